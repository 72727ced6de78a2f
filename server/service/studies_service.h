// What clients ask about studies: changes go to the ledger, reads to the readers.
#pragma once

#include <cstdint>
#include <functional>
#include <set>
#include <string>

#include "drover/v1/studies.grpc.pb.h"
#include "ledger/ledger.h"
#include "ledger/readers.h"
#include "service/plans.h"
#include "service/reply.h"
#include "service/study_polls.h"
#include "service/study_reads.h"

namespace drover::service {

// Borrows the ledger and the readers, which must outlive the server's shutdown. No call blocks a gRPC thread.
class StudiesService final : public v1::Studies::CallbackService {
 public:
  struct Fresh {
    std::function<std::uint64_t()> seed;
    std::string fingerprint;  // of the machine
  };
  StudiesService(ledger::Ledger& ledger, ledger::Readers& readers, Fresh fresh);

  // After a commit: wakes those who wait for one of the studies. Thread-safe, does not block.
  void changed(const std::set<std::int64_t>& studies) { polls_.changed(studies); }
  // Answers all that wait.
  void end_polls() { polls_.end(); }

  using Context = grpc::CallbackServerContext;
  using Reactor = grpc::ServerUnaryReactor;
  Reactor* CheckStudy(Context*, const v1::CheckStudyRequest*, v1::CheckStudyResponse*) override;
  Reactor* StartStudy(Context*, const v1::StartStudyRequest*, v1::Study*) override;
  Reactor* ListStudies(Context*, const v1::ListStudiesRequest*, v1::ListStudiesResponse*) override;
  Reactor* GetStudy(Context*, const v1::GetStudyRequest*, v1::Study*) override;
  Reactor* GetCandidate(Context*, const v1::GetCandidateRequest*, v1::Candidate*) override;
  Reactor* ListCandidates(Context*, const v1::ListCandidatesRequest*, v1::ListCandidatesResponse*) override;
  Reactor* ListRuns(Context*, const v1::ListRunsRequest*, v1::ListRunsResponse*) override;
  Reactor* PauseStudy(Context*, const v1::PauseStudyRequest*, v1::Study*) override;
  Reactor* ResumeStudy(Context*, const v1::ResumeStudyRequest*, v1::Study*) override;
  Reactor* StopStudy(Context*, const v1::StopStudyRequest*, v1::Study*) override;
  Reactor* ListCodes(Context*, const v1::ListCodesRequest*, v1::ListCodesResponse*) override;
  Reactor* ListWorkers(Context*, const v1::ListWorkersRequest*, v1::ListWorkersResponse*) override;
  Reactor* GetCoordinator(Context*, const v1::GetCoordinatorRequest*, v1::Coordinator*) override;

 private:
  template <class Response>
  Reactor* read(Response* response, std::function<absl::StatusOr<Response>(store::Reader&)> question);
  template <class Request>
  Reactor* change(const Request& request, v1::Study* response,
                  std::function<absl::StatusOr<v1::Study>(ledger::Turn&, const Request&)> handler);
  void wait_for_study(const v1::GetStudyRequest& request, Reply<v1::Study>* reply);

  ledger::Ledger& ledger_;
  ledger::Readers& readers_;
  Fresh fresh_;
  Plans plans_;
  StudyReads reads_;
  StudyPolls polls_;
};

}  // namespace drover::service
