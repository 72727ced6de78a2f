// One unary call in the callback service: finished once, from any thread, and told when nobody waits any more.
#pragma once

#include <atomic>
#include <functional>
#include <memory>
#include <utility>

#include <grpcpp/grpcpp.h>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "link/status.h"

namespace drover::service {

// Owns itself: gRPC deletes it through OnDone() after finish(). `gone()` may be kept longer than the object.
template <class Response>
class Reply final : public grpc::ServerUnaryReactor {
 public:
  explicit Reply(Response* response) : response_(response) {}

  // Exactly once.
  void finish(absl::StatusOr<Response> answer) {
    if (answer.ok()) *response_ = *std::move(answer);
    Finish(link::to_grpc(answer.status()));
  }

  // Whether the caller hung up. Thread-safe.
  std::function<bool()> gone() const {
    return [flag = gone_] { return flag->load(); };
  }

 private:
  void OnCancel() override { gone_->store(true); }
  void OnDone() override { delete this; }

  Response* response_;
  // Shared with whoever still holds the call in a queue when it is over.
  std::shared_ptr<std::atomic<bool>> gone_ = std::make_shared<std::atomic<bool>>(false);
};

}  // namespace drover::service
