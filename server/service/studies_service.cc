#include "service/studies_service.h"

#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/durations.h"
#include "ledger/handlers.h"
#include "service/request_digest.h"
#include "status/try.h"
#include "study/spec_check.h"

namespace drover::service {
namespace {

// Until certificates name who calls, every caller of this service is a person of this machine.
constexpr char kPrincipal[] = "owner";
constexpr absl::Duration kLongestWait = absl::Seconds(25);

template <class Response>
grpc::ServerUnaryReactor* at_once(Response* response, absl::StatusOr<Response> answer) {
  auto* const reply = new Reply<Response>(response);
  reply->finish(std::move(answer));
  return reply;
}

}  // namespace

StudiesService::StudiesService(ledger::Ledger& ledger, ledger::Readers& readers, Fresh fresh)
    : ledger_(ledger), readers_(readers), fresh_(std::move(fresh)), reads_(ledger, plans_) {}

template <class Response>
grpc::ServerUnaryReactor* StudiesService::read(Response* response,
                                               std::function<absl::StatusOr<Response>(store::Reader&)> question) {
  auto* const reply = new Reply<Response>(response);
  readers_.submit([reply, gone = reply->gone(), question = std::move(question)](store::Reader& reader) {
    if (gone()) return reply->finish(absl::CancelledError("the caller hung up"));
    reply->finish(question(reader));
  });
  return reply;
}

template <class Request>
grpc::ServerUnaryReactor* StudiesService::change(
    const Request& request, v1::Study* response,
    std::function<absl::StatusOr<v1::Study>(ledger::Turn&, const Request&)> handler) {
  if (request.request_id().size() < 8 || request.request_id().size() > 128) {
    return at_once<v1::Study>(response, absl::InvalidArgumentError(
                                            "request_id: 8 to 128 characters are needed, unique for each new request"));
  }
  auto* const reply = new Reply<v1::Study>(response);
  ledger_.submit(ledger::make_call<Request, v1::Study>(
      request, request.request_id(), kPrincipal, request_digest(request), std::move(handler),
      [reply](absl::StatusOr<v1::Study> answer) { reply->finish(std::move(answer)); }));
  return reply;
}

grpc::ServerUnaryReactor* StudiesService::CheckStudy(Context*, const v1::CheckStudyRequest* request,
                                                     v1::CheckStudyResponse* response) {
  // On a reading thread, since a large spec takes a while.
  return read<v1::CheckStudyResponse>(response, [this, spec = request->spec()](store::Reader& reader) {
    const std::vector<v1::CodeDefinition> codes = ledger_.codes();
    int slots = 0;
    for (const v1::Worker& worker : ledger_.workers()) slots += worker.silent() ? 0 : worker.slots();
    const study::CheckResult checked = study::check_spec(
        spec, {.codes = codes, .slots = slots, .fresh_seed = fresh_.seed(), .now = ledger_.wall_time()});
    v1::CheckStudyResponse answer;
    *answer.mutable_problems() = {checked.problems.begin(), checked.problems.end()};
    absl::StatusOr<std::optional<store::StudyRow>> taken = reader.study(spec.name());
    if (taken.ok() && *taken) {
      v1::Problem& problem = *answer.add_problems();
      problem.set_field("study.name");
      problem.set_text(absl::StrCat("there is a study named ", spec.name(), " already"));
      problem.set_advice("give this one another name");
    }
    if (answer.problems().empty()) {
      *answer.mutable_effective() = checked.effective;
      answer.set_runs_per_candidate(checked.runs_per_candidate);
    }
    return absl::StatusOr<v1::CheckStudyResponse>(std::move(answer));
  });
}

grpc::ServerUnaryReactor* StudiesService::StartStudy(Context*, const v1::StartStudyRequest* request,
                                                     v1::Study* response) {
  const ledger::StartSettings settings{.fresh_seed = fresh_.seed(), .fingerprint = fresh_.fingerprint};
  return change<v1::StartStudyRequest>(*request, response,
                                       [settings](ledger::Turn& turn, const v1::StartStudyRequest& asked) {
                                         return ledger::start_study(turn, asked, settings);
                                       });
}

grpc::ServerUnaryReactor* StudiesService::ListStudies(Context*, const v1::ListStudiesRequest* request,
                                                      v1::ListStudiesResponse* response) {
  return read<v1::ListStudiesResponse>(
      response, [this, asked = *request](store::Reader& reader) { return reads_.studies(reader, asked); });
}

grpc::ServerUnaryReactor* StudiesService::GetStudy(Context*, const v1::GetStudyRequest* request, v1::Study* response) {
  if (!request->has_wait() || request->seen_revision() == 0) {
    return read<v1::Study>(
        response, [this, name = request->study()](store::Reader& reader) { return reads_.study(reader, name); });
  }
  auto* const reply = new Reply<v1::Study>(response);
  wait_for_study(*request, reply);
  return reply;
}

// Reads the study; where nothing is new, waits for a change and reads it again, whatever it finds then.
void StudiesService::wait_for_study(const v1::GetStudyRequest& request, Reply<v1::Study>* reply) {
  readers_.submit([this, request, reply, gone = reply->gone()](store::Reader& reader) {
    absl::StatusOr<store::StudyRow> row = reads_.row(reader, request.study());
    const bool nothing_new = row.ok() && row->revision <= request.seen_revision();
    if (gone() || !nothing_new) return reply->finish(reads_.study(reader, request.study()));
    const std::int64_t seen = row->revision;
    const absl::Duration wait = std::min(ledger::to_duration(request.wait()), kLongestWait);
    polls_.add(row->id, wait, [this, reply, name = request.study()] {
      readers_.submit([this, reply, name](store::Reader& later) { reply->finish(reads_.study(later, name)); });
    });
    // It may have gone on between the read and the wait.
    readers_.submit([this, id = row->id, seen, name = request.study()](store::Reader& again) {
      const absl::StatusOr<store::StudyRow> now = reads_.row(again, name);
      if (!now.ok() || now->revision > seen) polls_.changed({id});
    });
  });
}

grpc::ServerUnaryReactor* StudiesService::GetCandidate(Context*, const v1::GetCandidateRequest* request,
                                                       v1::Candidate* response) {
  return read<v1::Candidate>(
      response, [this, asked = *request](store::Reader& reader) { return reads_.candidate(reader, asked); });
}

grpc::ServerUnaryReactor* StudiesService::ListCandidates(Context*, const v1::ListCandidatesRequest* request,
                                                         v1::ListCandidatesResponse* response) {
  return read<v1::ListCandidatesResponse>(
      response, [this, asked = *request](store::Reader& reader) { return reads_.candidates(reader, asked); });
}

grpc::ServerUnaryReactor* StudiesService::ListRuns(Context*, const v1::ListRunsRequest* request,
                                                   v1::ListRunsResponse* response) {
  return read<v1::ListRunsResponse>(
      response, [this, asked = *request](store::Reader& reader) { return reads_.runs(reader, asked); });
}

grpc::ServerUnaryReactor* StudiesService::PauseStudy(Context*, const v1::PauseStudyRequest* request,
                                                     v1::Study* response) {
  return change<v1::PauseStudyRequest>(*request, response, [](ledger::Turn& turn, const v1::PauseStudyRequest& asked) {
    return ledger::pause_study(turn, asked.study());
  });
}

grpc::ServerUnaryReactor* StudiesService::ResumeStudy(Context*, const v1::ResumeStudyRequest* request,
                                                      v1::Study* response) {
  return change<v1::ResumeStudyRequest>(*request, response,
                                        [](ledger::Turn& turn, const v1::ResumeStudyRequest& asked) {
                                          return ledger::resume_study(turn, asked.study());
                                        });
}

grpc::ServerUnaryReactor* StudiesService::StopStudy(Context*, const v1::StopStudyRequest* request,
                                                    v1::Study* response) {
  return change<v1::StopStudyRequest>(*request, response, [](ledger::Turn& turn, const v1::StopStudyRequest& asked) {
    return ledger::stop_study(turn, asked.study());
  });
}

grpc::ServerUnaryReactor* StudiesService::ListCodes(Context*, const v1::ListCodesRequest*,
                                                    v1::ListCodesResponse* response) {
  v1::ListCodesResponse answer;
  for (v1::CodeDefinition& code : ledger_.codes()) *answer.add_codes() = std::move(code);
  return at_once<v1::ListCodesResponse>(response, std::move(answer));
}

grpc::ServerUnaryReactor* StudiesService::ListWorkers(Context*, const v1::ListWorkersRequest*,
                                                      v1::ListWorkersResponse* response) {
  v1::ListWorkersResponse answer;
  for (v1::Worker& worker : ledger_.workers()) *answer.add_workers() = std::move(worker);
  return at_once<v1::ListWorkersResponse>(response, std::move(answer));
}

grpc::ServerUnaryReactor* StudiesService::GetCoordinator(Context*, const v1::GetCoordinatorRequest*,
                                                         v1::Coordinator* response) {
  return at_once<v1::Coordinator>(response, ledger_.coordinator());
}

}  // namespace drover::service
