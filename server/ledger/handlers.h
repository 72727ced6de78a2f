// What each request decides. Every function reads the state, emits events through its turn and returns the answer;
// whatever can be refused is refused before the first event. They run on the writer thread, one after the other.
//
// Transitions are those of the lease protocol: docs/lease-protocol.md.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "drover/v1/problem.pb.h"
#include "drover/v1/studies.pb.h"
#include "drover/v1/work.pb.h"
#include "ledger/turn.h"
#include "search/method.h"

namespace drover::ledger {

// --- workers ---
// FAILED_PRECONDITION with reason NAME_IN_USE, OTHER_STORE or STORE_BEHIND.
absl::StatusOr<v1::EnrolResponse> enrol(Turn& turn, const v1::EnrolRequest& request, const std::string& fresh_token);
// Without grants when there is nothing; the ledger lets it wait. FAILED_PRECONDITION, reason NO_SUCH_SESSION.
absl::StatusOr<v1::LeaseResponse> lease(Turn& turn, const v1::LeaseRequest& request);
absl::StatusOr<v1::RenewResponse> renew(Turn& turn, const v1::RenewRequest& request);
absl::StatusOr<v1::ReportResponse> report(Turn& turn, const v1::ReportRequest& request);
// Grants up to `want` runs to the session.
absl::StatusOr<std::vector<v1::Grant>> grant_runs(Turn& turn, std::int64_t session, int want);
// The session of a token, heard from now. FAILED_PRECONDITION, reason NO_SUCH_SESSION.
absl::StatusOr<std::int64_t> session_of(Turn& turn, const std::string& token);

// --- studies ---
struct StartSettings {
  std::uint64_t fresh_seed = 0;
  std::string fingerprint;  // of this machine
};
// Each answers with the study as it left it, with the counts of its open runs; the best design and what is settled are
// read.
absl::StatusOr<v1::Study> start_study(Turn& turn, const v1::StartStudyRequest& request, const StartSettings& settings);
absl::StatusOr<v1::Study> pause_study(Turn& turn, const std::string& name);
absl::StatusOr<v1::Study> resume_study(Turn& turn, const std::string& name);
absl::StatusOr<v1::Study> stop_study(Turn& turn, const std::string& name);

// What a study's own thread hands in: asks it made after learning `absorbed_through`.
struct Asked {
  std::int64_t study = 0;
  std::int64_t absorbed_before = 0;  // refused (ABORTED) unless that is how far the study has learned
  std::int64_t absorbed_through = 0;
  struct One {
    search::Ask ask;
    std::int64_t learned_through = 0;
  };
  std::vector<One> asks;
  std::string search_state;
  search::Progress progress;
  bool dry = false;  // it was asked and gave nothing although nothing is out
};
absl::Status issue_asks(Turn& turn, const Asked& asked);
// The study's method broke.
absl::Status fail_study(Turn& turn, std::int64_t study, const std::string& why);

// --- what follows from other things ---
// All that time alone brings about: lapses, patience, licences, deadlines.
absl::Status pass_time(Turn& turn);
// Ends a run without a result, and its candidate if that was the last of its runs.
absl::Status withdraw(Turn& turn, std::int64_t run);
// To be called after a run has come to its end: scores the candidate when it was the last of its runs.
absl::Status after_run(Turn& turn, std::int64_t study, std::int64_t candidate);
// A STOPPING study without open runs becomes STOPPED.
absl::Status after_stop(Turn& turn, std::int64_t study);
// The attempt ended without knowledge: the run waits again, is set aside, or is withdrawn with its study.
absl::StatusOr<store::Appended> lose(Turn& turn, std::int64_t run, std::int64_t fence, v1::AttemptReport report);

// A status with a machine-readable reason for the edge to carry.
absl::Status refusal(absl::StatusCode code, const std::string& reason, const std::string& message);
// INVALID_ARGUMENT with all problems of a spec.
absl::Status problems_refusal(const std::vector<v1::Problem>& problems);

}  // namespace drover::ledger
