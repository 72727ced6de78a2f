// The coordinator as commands see it: one method a call of the contract.
#pragma once

#include <functional>
#include <memory>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "commands/interruption.h"
#include "drover/v1/studies.grpc.pb.h"
#include "link/clock.h"

namespace drover::commands {

// Every call is repeated, after growing waits, while its error is worth repeating and `patience` lasts; calls that
// change something carry one request_id through all their repetitions. Errors are those of the contract, with their
// ErrorDetail; UNAVAILABLE says where nobody answered and what to do. An interruption ends the waiting. Lists come with
// all their pages. Not thread-safe; the references must outlive it.
class Coordinator {
 public:
  // Called before each repetition; an error of it ends the call.
  using Meanwhile = std::function<absl::Status()>;

  // INVALID_ARGUMENT: not an address; UNIMPLEMENTED: one that cannot be had. Connects when first called.
  static absl::StatusOr<std::unique_ptr<Coordinator>> at(const std::string& address, const link::Clock& clock,
                                                         const Interruption& interruption,
                                                         absl::Duration patience = absl::Seconds(3),
                                                         Meanwhile meanwhile = nullptr);

  absl::StatusOr<v1::CheckStudyResponse> check(const v1::StudySpec& spec);
  absl::StatusOr<v1::Study> start(const v1::StudySpec& spec, const std::string& owner);
  absl::StatusOr<std::vector<v1::Study>> list();
  absl::StatusOr<v1::Study> study(const std::string& name);
  // Waits up to `wait` for a revision above `seen`.
  absl::StatusOr<v1::Study> study_after(const std::string& name, std::int64_t seen, absl::Duration wait);
  absl::StatusOr<v1::Candidate> candidate(const std::string& study, std::int64_t number);  // 0: the best
  // Hands over page by page until `take` says that it wants no more.
  absl::Status candidates(const std::string& study, const std::function<bool(const v1::Candidate&)>& take);
  absl::Status runs(const std::string& study, bool open_only, const std::function<bool(const v1::Run&)>& take);
  absl::StatusOr<v1::Study> pause(const std::string& study);
  absl::StatusOr<v1::Study> resume(const std::string& study);
  absl::StatusOr<v1::Study> stop(const std::string& study);
  absl::StatusOr<std::vector<v1::Worker>> workers();
  absl::StatusOr<v1::Coordinator> about();

 private:
  Coordinator(std::string address, std::shared_ptr<grpc::Channel> channel, const link::Clock& clock,
              const Interruption& interruption, absl::Duration patience, Meanwhile meanwhile);
  // Until `span` is over or, where there is no connection, there is one. True when interrupted.
  bool pause_for(absl::Duration span);

  template <class Request, class Response>
  using Method = grpc::Status (v1::Studies::Stub::*)(grpc::ClientContext*, const Request&, Response*);
  template <class Request, class Response>
  absl::StatusOr<Response> call(Method<Request, Response> method, const Request& request, absl::Duration limit);
  template <class Request>
  absl::StatusOr<v1::Study> change(Method<Request, v1::Study> method, const std::string& study);

  std::string address_;
  std::shared_ptr<grpc::Channel> channel_;  // gRPC shares channels
  std::unique_ptr<v1::Studies::Stub> stub_;
  const link::Clock& clock_;
  const Interruption& interruption_;
  absl::Duration patience_;
  Meanwhile meanwhile_;
};

}  // namespace drover::commands
