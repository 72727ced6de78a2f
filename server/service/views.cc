#include "service/views.h"

#include <algorithm>
#include <cmath>
#include <utility>

#include "ledger/durations.h"
#include "search/space.h"
#include "status/try.h"
#include "study/bytes.h"

namespace drover::service {
namespace {

google::protobuf::Timestamp timestamp(std::int64_t us) {
  google::protobuf::Timestamp time;
  time.set_seconds(us / 1'000'000);
  time.set_nanos(static_cast<std::int32_t>(us % 1'000'000) * 1000);
  return time;
}

void add_counts(v1::RunCounts& counts, const store::StudyRow& row, const std::map<std::string, std::int64_t>& open) {
  const auto of = [&](const char* state) {
    const auto at = open.find(state);
    return at == open.end() ? 0 : at->second;
  };
  counts.set_waiting(of("waiting"));
  counts.set_granted(of("granted"));
  counts.set_begun(of("begun"));
  counts.set_parked(of("parked"));
  counts.set_stopping(of("stopping"));
  counts.set_set_aside(of("set_aside"));
  counts.set_evaluated(row.evaluated);
  counts.set_failed(row.failed);
  counts.set_withdrawn(row.withdrawn);
}

// The swarm's box in the user's units.
absl::Status add_swarm(v1::Study& study, const store::StudyRow& row, const study::StudyPlan& plan) {
  DROVER_ASSIGN(const search::Point low, study::unpack_doubles(row.swarm_low));
  DROVER_ASSIGN(const search::Point high, study::unpack_doubles(row.swarm_high));
  if (low.size() != plan.space().size() || high.size() != low.size()) return absl::OkStatus();  // no swarm
  for (const double value : plan.space().to_user(low)) study.add_swarm_low(value);
  for (const double value : plan.space().to_user(high)) study.add_swarm_high(value);
  return absl::OkStatus();
}

const store::AttemptRow* telling(const store::RunRow& row) {
  const store::AttemptRow* told = nullptr;
  for (const store::AttemptRow& attempt : row.attempts) {
    if (!attempt.released || told == nullptr) told = &attempt;
  }
  return told;
}

bool is_open(const store::AttemptRow& attempt) {
  return attempt.state == "granted" || attempt.state == "begun" || attempt.state == "parked" ||
         attempt.state == "stopping";
}

v1::RunState run_state(const store::RunRow& row) {
  if (row.life == "settled") return v1::RUN_STATE_SETTLED;
  if (row.life == "withdrawn") return v1::RUN_STATE_WITHDRAWN;
  if (row.life == "set_aside") return v1::RUN_STATE_SET_ASIDE;
  v1::RunState state = v1::RUN_STATE_WAITING;
  for (const store::AttemptRow& attempt : row.attempts) {
    if (attempt.released || !is_open(attempt)) continue;
    if (attempt.state == "granted") state = v1::RUN_STATE_GRANTED;
    if (attempt.state == "begun") state = v1::RUN_STATE_BEGUN;
    if (attempt.state == "parked") state = v1::RUN_STATE_PARKED;
    if (attempt.state == "stopping") state = v1::RUN_STATE_STOPPING;
  }
  return state;
}

void add_report(v1::Run& run, const v1::AttemptReport& report, const study::StudyPlan& plan) {
  run.set_ending(report.ending());
  run.set_failure(report.failure());
  if (report.usage().has_wall()) *run.mutable_wall() = report.usage().wall();
  for (const v1::OutputValue& output : report.outputs()) {
    v1::NamedValue& value = *run.add_outputs();
    value.set_name(output.name());
    value.set_number(output.value());
    const auto& declared = plan.code().outputs();
    const auto at = std::find_if(declared.begin(), declared.end(),
                                 [&](const v1::CodeOutput& one) { return one.name() == output.name(); });
    if (at != declared.end()) value.set_unit(at->unit());
  }
  if (report.ending() == v1::ENDING_FAILED) {
    run.set_stdout_tail(report.stdout_tail());
    run.set_stderr_tail(report.stderr_tail());
  }
}

std::vector<study::RunResult> results_of(std::span<const store::RunRow> runs) {
  std::vector<study::RunResult> results;
  for (const store::RunRow& run : runs) {
    if (run.life != "settled" || run.attempts.empty() || !run.attempts.front().report) continue;
    results.push_back({run.condition, run.replicate, *run.attempts.front().report});
  }
  return results;
}

}  // namespace

absl::StatusOr<v1::Study> study_view(const store::StudyRow& row, const study::StudyPlan* plan,
                                     const std::map<std::string, std::int64_t>& open_counts,
                                     const ledger::Ledger::StudyFigures& figures) {
  v1::Study study;
  study.set_name(row.name);
  study.set_owner(row.owner);
  study.set_state(row.state);
  study.set_reason(row.reason);
  study.set_sentence(row.sentence);
  study.set_revision(row.revision);
  if (plan != nullptr) *study.mutable_spec() = row.spec;
  add_counts(*study.mutable_runs(), row, open_counts);
  study.set_candidates(row.candidates);
  study.set_learned(row.absorbed);
  study.set_attempts_lost(row.lost);
  study.set_workers_busy(figures.workers_busy);
  study.set_slots(figures.slots);
  *study.mutable_create_time() = timestamp(row.create_us);
  if (row.end_us > 0) *study.mutable_end_time() = timestamp(row.end_us);
  if (const std::int64_t settled = row.evaluated + row.failed; settled > 0) {
    ledger::set(*study.mutable_mean_run_time(), absl::Microseconds(row.wall_us) / settled);
  }
  if (plan != nullptr) DROVER_TRY(add_swarm(study, row, *plan));
  return study;
}

absl::StatusOr<v1::Candidate> candidate_view(const store::CandidateRow& row, const study::StudyPlan& plan) {
  v1::Candidate candidate;
  candidate.set_number(row.number);
  candidate.set_origin(row.origin);
  DROVER_ASSIGN(const std::vector<double> values, study::unpack_doubles(row.values));
  for (v1::NamedValue& value : plan.named_values(values)) *candidate.add_values() = std::move(value);
  if (!row.score) return candidate;
  candidate.set_verdict(row.score->verdict());
  candidate.set_reason(row.score->reason());
  for (v1::NamedValue& value : plan.shown_objectives(*row.score)) *candidate.add_objectives() = std::move(value);
  for (v1::NamedValue& value : plan.shown_constraints(*row.score)) *candidate.add_constraints() = std::move(value);
  if (!row.score->violation().empty()) {
    DROVER_ASSIGN(const double violation, study::unpack_double(row.score->violation()));
    candidate.set_violation(violation);
  }
  return candidate;
}

absl::Status add_cells(v1::Candidate& candidate, const store::CandidateRow& row, std::span<const store::RunRow> runs,
                       const study::StudyPlan& plan) {
  DROVER_ASSIGN(const std::vector<double> values, study::unpack_doubles(row.values));
  const std::vector<study::RunResult> results = results_of(runs);
  for (int cell = 0; cell < static_cast<int>(plan.cells().size()); ++cell) {
    *candidate.add_cells() = plan.cell_result(values, cell, results);
  }
  return absl::OkStatus();
}

v1::Run run_view(const store::RunRow& row, std::int64_t attempts, const study::StudyPlan& plan,
                 const std::map<std::string, absl::Duration>& silent) {
  v1::Run run;
  run.set_number(row.number);
  run.set_id(row.id);
  run.set_candidate(row.candidate);
  run.set_condition(row.condition);
  run.set_replicate(row.replicate);
  run.set_state(run_state(row));
  run.set_reason(row.reason);
  run.set_attempts(attempts);
  const store::AttemptRow* const attempt = telling(row);
  if (attempt == nullptr) return run;
  run.set_worker(attempt->worker);
  if (run.reason().empty()) run.set_reason(attempt->reason);
  if (attempt->report && row.life == "settled") add_report(run, *attempt->report, plan);
  const auto heard = silent.find(attempt->worker);
  if (run.state() == v1::RUN_STATE_PARKED && heard != silent.end()) ledger::set(*run.mutable_silent(), heard->second);
  return run;
}

}  // namespace drover::service
