// A ledger with its learners on a folder of its own, under a clock that stands still, and short words for what workers
// and clients ask of it.
#pragma once

#include <atomic>
#include <cstdint>
#include <functional>
#include <map>
#include <memory>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "ledger/learner.h"
#include "ledger/ledger.h"

namespace drover::ledger {

struct BenchOptions {
  std::map<std::string, std::int32_t> licences;
  bool early_answers = false;  // the planted defect
  std::int64_t most_pages = 0;  // of the store; 0: no limit
  // Called with the folder and the answered request's id, before the caller hears of the answer.
  std::function<void(const std::string& folder, const std::string& request_id)> at_answer;
};

class Bench {
 public:
  explicit Bench(BenchOptions options = {});
  ~Bench();

  void restart();                   // as after a crash: nothing in memory is kept
  void restart_with_space();        // and the store may grow again
  void advance(absl::Duration by);  // the steady clock and the wall clock; returns when the ledger has noticed
  const std::string& folder() const { return folder_; }
  Ledger& ledger() { return *ledger_; }

  // --- requests; each with an id of its own unless one is given ---
  absl::StatusOr<v1::EnrolResponse> enrol(const std::string& worker, int slots, std::vector<v1::RollEntry> roll = {},
                                          std::int64_t incarnation = 1);
  std::string session(const std::string& worker, int slots);  // enrolled; the token
  absl::StatusOr<v1::LeaseResponse> lease(const std::string& session, int want,
                                          absl::Duration wait = absl::ZeroDuration());
  // Until as many runs were granted; asks again while the study's thread is at work.
  std::vector<v1::Grant> grants(const std::string& session, int count);
  absl::StatusOr<v1::ReportResponse> report(const std::string& session, const v1::AttemptReport& report);
  absl::StatusOr<v1::RenewResponse> renew(const std::string& session, const v1::Grant& grant, v1::RollState state);
  absl::StatusOr<v1::Study> start(const v1::StudySpec& spec);
  absl::StatusOr<v1::Study> change(const std::string& name,
                                   absl::StatusOr<v1::Study> (*handler)(Turn&, const std::string&));

  // The bytes of the answer.
  absl::StatusOr<std::string> call(const std::string& id, const std::string& digest,
                                   std::function<absl::StatusOr<std::string>(Turn&)> decide);

  // A number that a query over the committed store gives.
  std::int64_t count(const std::string& sql);
  std::string text(const std::string& sql);

 private:
  void open();
  void close();
  BenchOptions options_;
  std::string folder_;
  std::atomic<std::int64_t> ms_ = 0;
  std::int64_t ids_ = 0;
  std::unique_ptr<Ledger> ledger_;
  std::unique_ptr<Learners> learners_;
  std::atomic<Learners*> told_ = nullptr;
};

v1::CodeDefinition test_code();               // "hill": input x, output height, a licence of pool "token"
v1::StudySpec test_study(std::int64_t runs);  // minimises height over x, space-filling
v1::AttemptReport evaluated(const v1::Grant& grant, double height);
v1::AttemptReport failed(const v1::Grant& grant);
v1::AttemptReport lost(const v1::Grant& grant, v1::LossReason why);

// Waits for what another thread brings about.
bool eventually(const std::function<bool()>& holds);

}  // namespace drover::ledger
