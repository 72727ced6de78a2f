#include "commands/coordinator.h"

#include <utility>

#include "absl/strings/str_cat.h"
#include "link/address.h"
#include "link/channel.h"
#include "link/duration.h"
#include "link/identity.h"
#include "link/retry.h"
#include "link/status.h"
#include "status/try.h"

namespace drover::commands {
namespace {

constexpr absl::Duration kFirstWait = absl::Milliseconds(50);
constexpr absl::Duration kLongestWait = absl::Seconds(1);

// gRPC's chain of reasons ends with the one that says something: "...: No such file or directory)".
std::string last_reason(const absl::Status& status) {
  std::string text(status.message());
  const std::size_t at = text.rfind(": ");
  if (at != std::string::npos) text.erase(0, at + 2);
  while (!text.empty() && text.back() == ')') text.pop_back();
  return text;
}

// Says where nobody answered.
absl::Status explained(const absl::Status& status, const std::string& address) {
  const bool nobody = absl::IsUnavailable(status) || absl::IsDeadlineExceeded(status);
  if (!nobody) return status;
  return absl::Status(status.code(),
                      absl::StrCat("no coordinator answers at ", address, " (", last_reason(status),
                                   "); start one with: drover-coordinator serve, or name another with --coordinator"));
}

}  // namespace

Coordinator::Coordinator(std::string address, std::shared_ptr<grpc::Channel> channel, const link::Clock& clock,
                         const Interruption& interruption, absl::Duration patience, Meanwhile meanwhile)
    : address_(std::move(address)),
      channel_(std::move(channel)),
      stub_(v1::Studies::NewStub(channel_)),
      clock_(clock),
      interruption_(interruption),
      patience_(patience),
      meanwhile_(std::move(meanwhile)) {}

absl::StatusOr<std::unique_ptr<Coordinator>> Coordinator::at(const std::string& address, const link::Clock& clock,
                                                             const Interruption& interruption, absl::Duration patience,
                                                             Meanwhile meanwhile) {
  DROVER_ASSIGN(const link::Address parsed, link::Address::parse(address));
  DROVER_ASSIGN(const std::shared_ptr<grpc::Channel> channel, link::dial(parsed));
  return std::unique_ptr<Coordinator>(
      new Coordinator(address, channel, clock, interruption, patience, std::move(meanwhile)));
}

bool Coordinator::pause_for(absl::Duration span) {
  if (channel_->GetState(false) == GRPC_CHANNEL_READY) return interruption_.wait(span);
  // Not a plain sleep: gRPC moves a connection forward only while somebody waits in it, and a handshake that nobody
  // reads runs into its time limit.
  const gpr_timespec wait = gpr_time_from_nanos(absl::ToInt64Nanoseconds(span), GPR_TIMESPAN);
  channel_->WaitForConnected(gpr_time_add(gpr_now(GPR_CLOCK_MONOTONIC), wait));
  return interruption_.happened();
}

template <class Request, class Response>
absl::StatusOr<Response> Coordinator::call(Method<Request, Response> method, const Request& request,
                                           absl::Duration limit) {
  link::Backoff backoff(link::random_number(), kFirstWait, kLongestWait);
  const absl::Duration end = clock_.steady() + patience_;
  while (true) {
    grpc::ClientContext context;
    link::set_deadline(context, limit);
    Response response;
    const absl::Status status = link::from_grpc((stub_.get()->*method)(&context, request, &response));
    if (status.ok()) return response;
    const absl::Duration wait = backoff.next();
    const bool again = link::worth_repeating(status) && clock_.steady() + wait < end;
    if (!again || pause_for(wait)) return explained(status, address_);
    if (meanwhile_ != nullptr) DROVER_TRY(meanwhile_());
  }
}

template <class Request>
absl::StatusOr<v1::Study> Coordinator::change(Method<Request, v1::Study> method, const std::string& study) {
  Request request;
  request.set_request_id(link::random_id());
  request.set_study(study);
  return call(method, request, link::kCallLimit);
}

absl::StatusOr<v1::CheckStudyResponse> Coordinator::check(const v1::StudySpec& spec) {
  v1::CheckStudyRequest request;
  *request.mutable_spec() = spec;
  return call(&v1::Studies::Stub::CheckStudy, request, link::kCallLimit);
}

absl::StatusOr<v1::Study> Coordinator::start(const v1::StudySpec& spec, const std::string& owner) {
  v1::StartStudyRequest request;
  request.set_request_id(link::random_id());
  *request.mutable_spec() = spec;
  request.set_owner(owner);
  return call(&v1::Studies::Stub::StartStudy, request, link::kCallLimit);
}

absl::StatusOr<std::vector<v1::Study>> Coordinator::list() {
  std::vector<v1::Study> studies;
  v1::ListStudiesRequest request;
  do {
    DROVER_ASSIGN(v1::ListStudiesResponse page, call(&v1::Studies::Stub::ListStudies, request, link::kCallLimit));
    for (v1::Study& study : *page.mutable_studies()) studies.push_back(std::move(study));
    request.set_page_token(page.next_page_token());
  } while (!request.page_token().empty());
  return studies;
}

absl::StatusOr<v1::Study> Coordinator::study(const std::string& name) {
  v1::GetStudyRequest request;
  request.set_study(name);
  return call(&v1::Studies::Stub::GetStudy, request, link::kCallLimit);
}

absl::StatusOr<v1::Study> Coordinator::study_after(const std::string& name, std::int64_t seen, absl::Duration wait) {
  v1::GetStudyRequest request;
  request.set_study(name);
  request.set_seen_revision(seen);
  *request.mutable_wait() = link::to_proto(wait);
  return call(&v1::Studies::Stub::GetStudy, request, wait + link::kCallLimit);
}

absl::StatusOr<v1::Candidate> Coordinator::candidate(const std::string& study, std::int64_t number) {
  v1::GetCandidateRequest request;
  request.set_study(study);
  request.set_number(number);
  return call(&v1::Studies::Stub::GetCandidate, request, link::kCallLimit);
}

absl::Status Coordinator::candidates(const std::string& study, const std::function<bool(const v1::Candidate&)>& take) {
  v1::ListCandidatesRequest request;
  request.set_study(study);
  do {
    DROVER_ASSIGN(const v1::ListCandidatesResponse page,
                  call(&v1::Studies::Stub::ListCandidates, request, link::kCallLimit));
    for (const v1::Candidate& candidate : page.candidates()) {
      if (!take(candidate)) return absl::OkStatus();
    }
    request.set_page_token(page.next_page_token());
  } while (!request.page_token().empty());
  return absl::OkStatus();
}

absl::Status Coordinator::runs(const std::string& study, bool open_only,
                               const std::function<bool(const v1::Run&)>& take) {
  v1::ListRunsRequest request;
  request.set_study(study);
  request.set_open_only(open_only);
  do {
    DROVER_ASSIGN(const v1::ListRunsResponse page, call(&v1::Studies::Stub::ListRuns, request, link::kCallLimit));
    for (const v1::Run& run : page.runs()) {
      if (!take(run)) return absl::OkStatus();
    }
    request.set_page_token(page.next_page_token());
  } while (!request.page_token().empty());
  return absl::OkStatus();
}

absl::StatusOr<v1::Study> Coordinator::pause(const std::string& study) {
  return change(&v1::Studies::Stub::PauseStudy, study);
}

absl::StatusOr<v1::Study> Coordinator::resume(const std::string& study) {
  return change(&v1::Studies::Stub::ResumeStudy, study);
}

absl::StatusOr<v1::Study> Coordinator::stop(const std::string& study) {
  return change(&v1::Studies::Stub::StopStudy, study);
}

absl::StatusOr<std::vector<v1::Worker>> Coordinator::workers() {
  DROVER_ASSIGN(v1::ListWorkersResponse page,
                call(&v1::Studies::Stub::ListWorkers, v1::ListWorkersRequest(), link::kCallLimit));
  return std::vector<v1::Worker>(page.workers().begin(), page.workers().end());
}

absl::StatusOr<v1::Coordinator> Coordinator::about() {
  return call(&v1::Studies::Stub::GetCoordinator, v1::GetCoordinatorRequest(), link::kCallLimit);
}

}  // namespace drover::commands
