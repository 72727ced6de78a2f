// How attempts end. The first valid report settles its run, whatever became of its lease (design.md, I2).
#include <cmath>
#include <optional>
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/handlers.h"
#include "status/try.h"

namespace drover::ledger {
namespace {

constexpr int kReportsPerCall = 100;
constexpr std::size_t kTailBytes = 64 << 10;
constexpr std::size_t kReasonBytes = 4 << 10;

bool has_result(const v1::AttemptReport& report) {
  return report.ending() == v1::ENDING_EVALUATED || report.ending() == v1::ENDING_FAILED ||
         report.ending() == v1::ENDING_BOUNDED;
}

absl::Status check_form(const v1::ReportRequest& request) {
  if (request.reports_size() > kReportsPerCall) {
    return absl::InvalidArgumentError(absl::StrCat("reports: ", request.reports_size(), " in one call; at most ",
                                                   kReportsPerCall));
  }
  for (const v1::AttemptReport& report : request.reports()) {
    const std::string where = absl::StrCat("report of attempt ", report.fence(), " at run ", report.run());
    if (report.ending() <= v1::ENDING_UNSPECIFIED || report.ending() > v1::ENDING_STOPPED) {
      return absl::InvalidArgumentError(absl::StrCat(where, ": ending ", report.ending(), " is not known"));
    }
    if (report.stdout_tail().size() > kTailBytes || report.stderr_tail().size() > kTailBytes ||
        report.reason().size() > kReasonBytes) {
      return absl::InvalidArgumentError(absl::StrCat(where, ": a text is longer than allowed"));
    }
    for (const v1::OutputValue& output : report.outputs()) {
      if (!std::isfinite(output.value())) {
        return absl::InvalidArgumentError(absl::StrCat(where, ": output ", output.name(), " is not a finite number"));
      }
    }
  }
  return absl::OkStatus();
}

v1::Receipt receipt(Turn& turn, const v1::AttemptReport& report, const store::Appended& event,
                    v1::Reception reception) {
  v1::Receipt receipt;
  receipt.set_run(report.run());
  receipt.set_fence(report.fence());
  receipt.set_store_id(turn.store().store_id());
  receipt.set_term(turn.store().term());
  receipt.set_event(event.number);
  receipt.set_chain_hash(event.hash);
  receipt.set_reception(reception);
  return receipt;
}

absl::StatusOr<v1::Receipt> refuse(Turn& turn, const v1::AttemptReport& report, std::int64_t study,
                                   const std::string& worker, const std::string& why) {
  study::Event event;
  event.mutable_refused()->set_run(report.run());
  event.mutable_refused()->set_fence(report.fence());
  event.mutable_refused()->set_worker(worker);
  event.mutable_refused()->set_reason(why);
  DROVER_ASSIGN(const store::Appended appended, turn.emit(study, std::move(event)));
  v1::Receipt answer = receipt(turn, report, appended, v1::RECEPTION_REFUSED);
  answer.set_reason(why);
  return answer;
}

absl::StatusOr<v1::Receipt> settle(Turn& turn, const v1::AttemptReport& report) {
  const dispatch::Run& run = *turn.state().book.run(report.run());
  const std::int64_t study = run.study, candidate = run.candidate;
  study::Event event;
  event.mutable_settled()->set_run(report.run());
  event.mutable_settled()->set_fence(report.fence());
  *event.mutable_settled()->mutable_report() = report;
  DROVER_ASSIGN(const store::Appended appended, turn.emit(study, std::move(event)));
  DROVER_TRY(after_run(turn, study, candidate));
  DROVER_TRY(after_stop(turn, study));
  return receipt(turn, report, appended, v1::RECEPTION_SETTLED);
}

absl::StatusOr<v1::Receipt> hand_back(Turn& turn, const v1::AttemptReport& report) {
  const dispatch::Run& run = *turn.state().book.run(report.run());
  const std::int64_t study = run.study;
  const bool stopping = run.attempts.at(report.fence()).state == dispatch::Attempt::State::kStopping;
  study::Event event;
  event.mutable_handed_back()->set_run(report.run());
  event.mutable_handed_back()->set_fence(report.fence());
  event.mutable_handed_back()->set_reason(report.reason());
  DROVER_ASSIGN(const store::Appended appended, turn.emit(study, std::move(event)));
  const dispatch::Run* const left = turn.state().book.run(report.run());
  if (stopping && left != nullptr && !left->closed && left->attempts.empty()) {
    DROVER_TRY(withdraw(turn, report.run()));
  }
  return receipt(turn, report, appended, v1::RECEPTION_NOTED);
}

// A further valid report of a run that is over.
absl::StatusOr<v1::Receipt> keep_duplicate(Turn& turn, const v1::AttemptReport& report, const store::RunRecord& run) {
  study::Event event;
  event.mutable_duplicate()->set_run(report.run());
  event.mutable_duplicate()->set_fence(report.fence());
  *event.mutable_duplicate()->mutable_report() = report;
  bool agrees = run.settling_report.ending() == report.ending() &&
                run.settling_report.outputs_size() == report.outputs_size();
  for (int i = 0; agrees && i < report.outputs_size(); ++i) {
    agrees = run.settling_report.outputs(i).SerializeAsString() == report.outputs(i).SerializeAsString();
  }
  event.mutable_duplicate()->set_agrees(agrees);
  DROVER_ASSIGN(const store::Appended appended, turn.emit(run.study, std::move(event)));
  return receipt(turn, report, appended, v1::RECEPTION_DUPLICATE);
}

// What is known of the attempt from the store, since the book only has open ones.
absl::StatusOr<v1::Receipt> take_late(Turn& turn, const v1::AttemptReport& report, const std::string& worker,
                                      const store::RunRecord& run, const store::AttemptRecord& attempt) {
  if (attempt.end_event != 0 && attempt.has_result) {  // delivered before; its receipt was lost
    v1::Receipt answer = receipt(turn, report, {attempt.end_event, attempt.end_hash},
                                 attempt.settled ? v1::RECEPTION_SETTLED : v1::RECEPTION_DUPLICATE);
    return answer;
  }
  const dispatch::Run* const open = turn.state().book.run(report.run());
  if (open != nullptr && !open->closed && has_result(report)) return settle(turn, report);
  if (has_result(report)) return keep_duplicate(turn, report, run);
  if (open != nullptr && open->attempts.contains(report.fence())) {
    DROVER_ASSIGN(const store::Appended appended, lose(turn, report.run(), report.fence(), report));
    return receipt(turn, report, appended, v1::RECEPTION_NOTED);
  }
  if (attempt.end_event != 0) {  // an end without a result, told again
    return receipt(turn, report, {attempt.end_event, attempt.end_hash}, v1::RECEPTION_NOTED);
  }
  return refuse(turn, report, run.study, worker, "the attempt is not open");
}

absl::StatusOr<v1::Receipt> take(Turn& turn, const v1::AttemptReport& report, const std::string& worker) {
  DROVER_ASSIGN(const std::optional<store::RunRecord> run, turn.store().find_run(report.run()));
  if (!run) return refuse(turn, report, 0, worker, "no such run was ever issued by this store");
  DROVER_ASSIGN(const std::optional<store::AttemptRecord> attempt,
                turn.store().find_attempt(report.run(), report.fence()));
  if (!attempt || attempt->worker != worker) {
    return refuse(turn, report, run->study, worker, "this fence was never granted to this worker");
  }
  if (report.input_digest() != run->input_digest && has_result(report)) {
    return refuse(turn, report, run->study, worker, "it ran other inputs than those that were granted");
  }
  const dispatch::Run* const open = turn.state().book.run(report.run());
  if (open == nullptr || open->closed || !open->attempts.contains(report.fence())) {
    return take_late(turn, report, worker, *run, *attempt);
  }
  const StudyRecord* const record = turn.state().study(open->study);
  const bool refuse_late = record != nullptr && record->spec.late() == v1::LATE_REPORTS_REFUSE;
  if (has_result(report) && refuse_late && report.fence() < open->fence) {
    v1::AttemptReport late = report;
    late.set_ending(v1::ENDING_LOST);
    DROVER_ASSIGN(const store::Appended appended, lose(turn, report.run(), report.fence(), std::move(late)));
    v1::Receipt answer = receipt(turn, report, appended, v1::RECEPTION_REFUSED);
    answer.set_reason("a newer attempt was granted, and the study refuses late reports");
    return answer;
  }
  if (has_result(report)) return settle(turn, report);
  if (report.ending() == v1::ENDING_NOT_BEGUN) return hand_back(turn, report);
  DROVER_ASSIGN(const store::Appended appended, lose(turn, report.run(), report.fence(), report));
  return receipt(turn, report, appended, v1::RECEPTION_NOTED);
}

}  // namespace

absl::StatusOr<v1::ReportResponse> report(Turn& turn, const v1::ReportRequest& request) {
  DROVER_TRY(check_form(request));
  DROVER_ASSIGN(const std::int64_t session, session_of(turn, request.session()));
  const std::string worker = turn.state().book.session(session)->worker;
  v1::ReportResponse response;
  for (const v1::AttemptReport& one : request.reports()) {
    DROVER_ASSIGN(*response.add_receipts(), take(turn, one, worker));
  }
  if (request.want() > 0) {
    DROVER_ASSIGN(std::vector<v1::Grant> grants, grant_runs(turn, session, request.want()));
    for (v1::Grant& grant : grants) *response.add_grants() = std::move(grant);
  }
  return response;
}

}  // namespace drover::ledger
