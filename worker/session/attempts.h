// Attempts from their order to their report: prepares and launches them, hears when their runners end, judges, and puts
// what there is to say into the spool.
#pragma once

#include <atomic>
#include <condition_variable>
#include <deque>
#include <functional>
#include <memory>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

#include "absl/status/statusor.h"
#include "code/catalogue.h"
#include "link/clock.h"
#include "process/files.h"
#include "process/survey.h"
#include "process/watcher.h"
#include "session/conversation.h"
#include "session/options.h"
#include "session/outbox.h"
#include "session/pause.h"
#include "session/roster.h"
#include "session/spool.h"

namespace drover::session {

// In the stop file of an attempt that ends because its worker does; else the reason of the order stands there.
inline constexpr char kWorkerEnds[] = "its worker ends";

// What attempts are made with. All must outlive them.
struct Tools {
  const Options& options;
  const code::Catalogue& catalogue;
  process::Files& files;
  Spool& spool;
  Roster& roster;
  Outbox& outbox;
  const link::Clock& clock;
};

// Thread-safe. Two threads of its own do what may take long.
class Attempts final : public Hands {
 public:
  static absl::StatusOr<std::unique_ptr<Attempts>> start(Tools tools);
  ~Attempts() override;

  // What earlier daemons left in the spool, before the first enrolment: ends what still runs, judges what has ended,
  // and leaves a report of every attempt that has no receipt. Blocks as long as simulations take to end.
  void recover();

  absl::Status take(const v1::Grant& grant) override;
  void stop(const Key& key, const std::string& reason) override;
  void acknowledged(const Key& key) override;

  // Nothing more is begun from now on: what waits, and what still comes, is handed back.
  void close();
  // After close(): what runs is stopped, and will be reported as lost to the end of this daemon.
  void stop_all();

 private:
  explicit Attempts(Tools tools) : tools_(tools) {}

  void enqueue(std::function<void()> task);
  void work();

  void begin(const Key& key);
  absl::Status launch(const Key& key, const v1::Grant& grant, const code::Definition& definition);
  absl::StatusOr<const code::Definition*> definition_of(const v1::Grant& grant) const;
  static absl::Duration time_limit(const v1::Grant& grant, const code::Definition& definition);
  void ended(const Key& key);
  void order_stop(const Key& key, const std::string& why);

  void recover_one(const SpoolEntry& entry);
  absl::StatusOr<process::Survey> end_predecessor(const Key& key, const v1::Grant& grant);
  v1::AttemptReport report_of_predecessor(const Key& key, const v1::Grant& grant);
  absl::Duration grace_of(const v1::Grant& grant) const;
  // The report that follows from what is found on the disk, when nothing of the attempt runs.
  v1::AttemptReport conclude(const Key& key, const v1::Grant& grant, const process::Survey& found) const;
  bool stop_was_ordered(const Key& key) const;
  v1::AttemptReport judge(const Key& key, const v1::Grant& grant, const process::Survey& found) const;
  v1::AttemptReport runner_failed(const Key& key) const;
  // Into the spool, whatever that takes; only the end of this daemon ends it earlier.
  void finish(const Key& key, const v1::Grant& grant, v1::AttemptReport report);
  void clear_away(const Key& key);

  std::string work_folder(const Key& key) const;
  std::string file(const Key& key, const char* name) const;

  Tools tools_;
  Pause pause_;
  std::atomic<bool> closing_ = false;
  std::mutex mutex_;  // of the queue
  std::condition_variable changed_;
  std::deque<std::function<void()>> tasks_;
  bool ended_ = false;
  std::vector<std::thread> threads_;
  std::unique_ptr<process::Watcher> watcher_;
};

}  // namespace drover::session
