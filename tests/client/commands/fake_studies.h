// A coordinator that answers what a test tells it to, on a Unix socket in a folder of its own.
#pragma once

#include <grpcpp/grpcpp.h>
#include <gtest/gtest.h>

#include <functional>
#include <memory>
#include <mutex>
#include <optional>
#include <string>
#include <vector>

#include "drover/v1/studies.grpc.pb.h"
#include "google/protobuf/text_format.h"
#include "link/status.h"
#include "temporary_folder.h"

namespace drover::commands {

template <class Message>
Message parsed(const std::string& text) {
  Message message;
  EXPECT_TRUE(google::protobuf::TextFormat::ParseFromString(text, &message)) << text;
  return message;
}

// An error as the real service makes it.
inline grpc::Status refused(absl::StatusCode code, const std::string& message, const std::string& detail = "") {
  absl::Status status(code, message);
  if (!detail.empty()) {
    status.SetPayload(absl::string_view(link::kErrorDetailUrl.data(), link::kErrorDetailUrl.size()),
                      absl::Cord(parsed<v1::ErrorDetail>(detail).SerializeAsString()));
  }
  return link::to_grpc(status);
}

class FakeStudies final : public v1::Studies::Service {
 public:
  // What is known; set before the first call.
  std::vector<v1::Study> studies;
  std::vector<v1::Candidate> candidates;
  std::vector<v1::Run> runs;
  v1::CheckStudyResponse check_answer;
  grpc::Status start_error = grpc::Status::OK;
  std::optional<v1::Study> once_started;  // what a study is found as after its start
  v1::StudyState resumed_to = v1::STUDY_STATE_ACTIVE;
  int failures_first = 0;  // that many changing calls fail with UNAVAILABLE after they were seen

  std::vector<std::string> request_ids() {
    const std::lock_guard lock(mutex_);
    return request_ids_;
  }
  std::vector<v1::StudySpec> started() {
    const std::lock_guard lock(mutex_);
    return started_;
  }

  grpc::Status CheckStudy(grpc::ServerContext*, const v1::CheckStudyRequest*, v1::CheckStudyResponse* answer) override {
    *answer = check_answer;
    return grpc::Status::OK;
  }

  grpc::Status StartStudy(grpc::ServerContext*, const v1::StartStudyRequest* request, v1::Study* study) override {
    if (!seen(request->request_id())) return refused(absl::StatusCode::kUnavailable, "not now");
    if (!start_error.ok()) return start_error;
    const std::lock_guard lock(mutex_);
    started_.push_back(request->spec());
    study->set_name(request->spec().name());
    study->set_owner(request->owner());
    study->set_state(v1::STUDY_STATE_ACTIVE);
    *study->mutable_spec() = request->spec();
    if (once_started.has_value()) studies.push_back(*once_started);
    return grpc::Status::OK;
  }

  grpc::Status ListWorkers(grpc::ServerContext*, const v1::ListWorkersRequest*,
                           v1::ListWorkersResponse* answer) override {
    answer->add_workers()->set_name("a");
    return grpc::Status::OK;
  }

  // In pages of one.
  grpc::Status ListStudies(grpc::ServerContext*, const v1::ListStudiesRequest* request,
                           v1::ListStudiesResponse* answer) override {
    page(studies, request->page_token(), *answer->mutable_studies(), *answer->mutable_next_page_token());
    return grpc::Status::OK;
  }
  grpc::Status ListCandidates(grpc::ServerContext*, const v1::ListCandidatesRequest* request,
                              v1::ListCandidatesResponse* answer) override {
    page(candidates, request->page_token(), *answer->mutable_candidates(), *answer->mutable_next_page_token());
    return grpc::Status::OK;
  }
  grpc::Status ListRuns(grpc::ServerContext*, const v1::ListRunsRequest* request,
                        v1::ListRunsResponse* answer) override {
    page(runs, request->page_token(), *answer->mutable_runs(), *answer->mutable_next_page_token());
    return grpc::Status::OK;
  }

  grpc::Status GetStudy(grpc::ServerContext*, const v1::GetStudyRequest* request, v1::Study* study) override {
    return find(request->study(), study);
  }

  grpc::Status GetCandidate(grpc::ServerContext*, const v1::GetCandidateRequest* request,
                            v1::Candidate* candidate) override {
    for (const v1::Candidate& each : candidates) {
      if (each.number() == request->number()) {
        *candidate = each;
        return grpc::Status::OK;
      }
    }
    return refused(absl::StatusCode::kNotFound, "no such candidate");
  }

  grpc::Status PauseStudy(grpc::ServerContext*, const v1::PauseStudyRequest* request, v1::Study* study) override {
    return change(*request, v1::STUDY_STATE_PAUSED, study);
  }
  grpc::Status ResumeStudy(grpc::ServerContext*, const v1::ResumeStudyRequest* request, v1::Study* study) override {
    return change(*request, resumed_to, study);
  }
  grpc::Status StopStudy(grpc::ServerContext*, const v1::StopStudyRequest* request, v1::Study* study) override {
    return change(*request, v1::STUDY_STATE_STOPPING, study);
  }

 private:
  template <class Message>
  static void page(const std::vector<Message>& all, const std::string& token,
                   google::protobuf::RepeatedPtrField<Message>& out, std::string& next) {
    const std::size_t at = token.empty() ? 0 : std::stoul(token);
    if (at < all.size()) *out.Add() = all[at];
    if (at + 1 < all.size()) next = std::to_string(at + 1);
  }

  // False: the call is to fail.
  bool seen(const std::string& request_id) {
    const std::lock_guard lock(mutex_);
    request_ids_.push_back(request_id);
    return static_cast<int>(request_ids_.size()) > failures_first;
  }

  grpc::Status find(const std::string& name, v1::Study* study) {
    for (const v1::Study& each : studies) {
      if (each.name() == name) {
        *study = each;
        return grpc::Status::OK;
      }
    }
    return refused(absl::StatusCode::kNotFound, "no study named " + name + "; the nearest is penstock",
                   "reason: 'NO_SUCH_STUDY'");
  }

  template <class Request>
  grpc::Status change(const Request& request, v1::StudyState state, v1::Study* study) {
    if (!seen(request.request_id())) return refused(absl::StatusCode::kUnavailable, "not now");
    grpc::Status status = find(request.study(), study);
    if (status.ok() && study->state() == v1::STUDY_STATE_FINISHED) {
      return refused(absl::StatusCode::kFailedPrecondition, "the study is finished");
    }
    study->set_state(state);
    return status;
  }

  std::mutex mutex_;
  std::vector<std::string> request_ids_;
  std::vector<v1::StudySpec> started_;
};

// Serves until it is destroyed.
class FakeCoordinator {
 public:
  FakeCoordinator() = default;
  ~FakeCoordinator() { stop(); }
  void serve() { serve_at(address()); }
  void serve_at(const std::string& where) {
    grpc::ServerBuilder builder;
    builder.AddListeningPort(where, grpc::InsecureServerCredentials());
    builder.RegisterService(&studies);
    server_ = builder.BuildAndStart();
    ASSERT_NE(server_, nullptr);
  }
  void stop() {
    if (server_ != nullptr) server_->Shutdown();
    server_.reset();
  }
  std::string address() const { return "unix:" + folder.file("s"); }

  TemporaryFolder folder;
  FakeStudies studies;

 private:
  std::unique_ptr<grpc::Server> server_;
};

}  // namespace drover::commands
