// What the coordinator keeps in memory: every open study, its open candidates, and dispatch's book.
//
// A fold over events, like the tables: loaded from the store at a start and after a commit that failed, changed only
// by apply(). Memory grows with open runs and open studies, never with settled ones. Owned by the writer thread.
#pragma once

#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "dispatch/book.h"
#include "drover/v1/code.pb.h"
#include "drover/v1/work.pb.h"
#include "store/store.h"
#include "study/asking.h"
#include "study/events.pb.h"
#include "study/plan.h"

namespace drover::ledger {

// A candidate some of whose runs are not at their end.
struct OpenCandidate {
  std::int64_t number = 0;
  std::int64_t ask = 0;
  std::vector<double> values;  // in the study's units
  int runs = 0;
  int ended = 0;               // settled or withdrawn
  std::vector<study::RunResult> results;  // of the settled ones
};

struct StudyRecord {
  std::int64_t id = 0;
  std::string name, owner;
  v1::StudySpec spec;  // effective
  v1::StudyState state = v1::STUDY_STATE_UNSPECIFIED;
  v1::StopReason reason = v1::STOP_REASON_UNSPECIFIED;
  std::string sentence;
  std::shared_ptr<const study::StudyPlan> plan;
  std::int64_t look_ahead = 0;
  std::int64_t asked = 0;       // by the search
  std::int64_t candidates = 0;  // issued, also by people
  std::int64_t runs = 0;        // issued
  std::int64_t used = 0;        // settled
  std::int64_t learned = 0;     // rows in the order of learning
  std::int64_t absorbed = 0;
  std::optional<study::CandidateScore> best;
  std::map<std::int64_t, OpenCandidate> open;

  bool final() const { return state == v1::STUDY_STATE_FINISHED || state == v1::STUDY_STATE_STOPPED; }
};

class State {
 public:
  explicit State(const dispatch::Times& times);

  // Everything open, from the store. DATA_LOSS or INTERNAL when the store cannot be read or does not fit together.
  static absl::StatusOr<std::unique_ptr<State>> load(store::Store& store, const dispatch::Times& times,
                                                     absl::Duration now);

  absl::Status apply(const study::Event& event, absl::Duration now);

  StudyRecord* study(std::int64_t id);
  const StudyRecord* study(std::int64_t id) const;
  StudyRecord* study(const std::string& name);
  const std::map<std::int64_t, StudyRecord>& studies() const { return studies_; }
  const v1::CodeDefinition* code(const std::string& digest) const;
  // Definitions that a live worker holds, by name, the newest last.
  std::vector<v1::CodeDefinition> live_codes() const;
  // Lets go of studies that have come to their end; to be called between turns.
  void forget_ended();
  study::Standing standing(const StudyRecord& record, absl::Time wall) const;

  dispatch::Book book;
  std::int64_t next_study = 1;
  std::int64_t next_run = 1;
  std::int64_t next_session = 1;
  // Roll calls that come in several pages, by worker.
  std::map<std::string, std::vector<v1::RollEntry>> roll_calls;

 private:
  absl::Status start_study(const study::StudyStarted& started);
  absl::Status add_study(StudyRecord record, const std::vector<study::Cell>& cells);
  void add_code(const v1::CodeDefinition& definition);
  absl::Status load_study(store::Store& store, const store::StudyRow& row);
  absl::Status load_runs(store::Store& store, absl::Duration now);
  absl::Status issue(StudyRecord& record, const study::AsksIssued& issued);
  void end_run(const dispatch::Run& run, const v1::AttemptReport* report);

  std::map<std::int64_t, StudyRecord> studies_;
  std::map<std::string, std::int64_t> by_name_;
  std::map<std::string, v1::CodeDefinition> codes_;
  std::vector<std::string> code_order_;  // digests, in the order of their definition
};

}  // namespace drover::ledger
