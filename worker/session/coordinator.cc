#include "session/coordinator.h"

#include <grpcpp/grpcpp.h>

#include <mutex>
#include <set>
#include <utility>

#include "drover/v1/work.grpc.pb.h"
#include "link/channel.h"
#include "link/duration.h"
#include "link/status.h"
#include "status/try.h"

namespace drover::session {
namespace {

constexpr absl::Duration kRenewLimit = absl::Seconds(10);
constexpr absl::Duration kPollMargin = absl::Seconds(15);  // the answer of a poll may be this late

class Stub final : public Coordinator {
 public:
  explicit Stub(const std::shared_ptr<grpc::Channel>& channel) : stub_(v1::Work::NewStub(channel)) {}

  absl::StatusOr<v1::EnrolResponse> enrol(const v1::EnrolRequest& request) override {
    return call<v1::EnrolResponse>(link::kCallLimit, calls_, [&](grpc::ClientContext* context, auto* answer) {
      return stub_->Enrol(context, request, answer);
    });
  }
  absl::StatusOr<v1::LeaseResponse> lease(const v1::LeaseRequest& request) override {
    const absl::Duration limit = link::from_proto(request.wait()) + kPollMargin;
    return call<v1::LeaseResponse>(limit, polls_, [&](grpc::ClientContext* context, auto* answer) {
      return stub_->Lease(context, request, answer);
    });
  }
  absl::StatusOr<v1::RenewResponse> renew(const v1::RenewRequest& request) override {
    return call<v1::RenewResponse>(kRenewLimit, calls_, [&](grpc::ClientContext* context, auto* answer) {
      return stub_->Renew(context, request, answer);
    });
  }
  absl::StatusOr<v1::ReportResponse> report(const v1::ReportRequest& request) override {
    return call<v1::ReportResponse>(link::kCallLimit, calls_, [&](grpc::ClientContext* context, auto* answer) {
      return stub_->Report(context, request, answer);
    });
  }

  void end_polls() override {
    const std::lock_guard lock(mutex_);
    for (grpc::ClientContext* const context : polls_) context->TryCancel();
  }
  void abandon() override {
    const std::lock_guard lock(mutex_);
    abandoned_ = true;
    for (grpc::ClientContext* const context : polls_) context->TryCancel();
    for (grpc::ClientContext* const context : calls_) context->TryCancel();
  }

 private:
  using Contexts = std::set<grpc::ClientContext*>;

  template <class Answer, class Call>
  absl::StatusOr<Answer> call(absl::Duration limit, Contexts& group, Call make) {
    grpc::ClientContext context;
    link::set_deadline(context, limit);
    context.set_wait_for_ready(true);  // while a call waits, the channel connects as soon as that is possible
    {
      const std::lock_guard lock(mutex_);
      if (abandoned_) return absl::CancelledError("this worker is ending");
      group.insert(&context);
    }
    Answer answer;
    const grpc::Status status = make(&context, &answer);
    {
      const std::lock_guard lock(mutex_);
      group.erase(&context);
    }
    DROVER_TRY(link::from_grpc(status));
    return answer;
  }

  const std::unique_ptr<v1::Work::Stub> stub_;
  std::mutex mutex_;
  bool abandoned_ = false;
  Contexts polls_, calls_;
};

}  // namespace

absl::StatusOr<std::unique_ptr<Coordinator>> dial(const link::Address& address) {
  DROVER_ASSIGN(const std::shared_ptr<grpc::Channel> channel, link::dial(address));
  return std::make_unique<Stub>(channel);
}

}  // namespace drover::session
