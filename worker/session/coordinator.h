// The coordinator as a worker speaks to it: one method an RPC of the service Work, each one call, without repetition.
#pragma once

#include <memory>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "drover/v1/work.pb.h"
#include "link/address.h"

namespace drover::session {

// Errors are those of the contract (work.proto), with their details (link/status.h). Thread-safe; calls block.
class Coordinator {
 public:
  virtual ~Coordinator() = default;
  virtual absl::StatusOr<v1::EnrolResponse> enrol(const v1::EnrolRequest& request) = 0;
  virtual absl::StatusOr<v1::LeaseResponse> lease(const v1::LeaseRequest& request) = 0;
  virtual absl::StatusOr<v1::RenewResponse> renew(const v1::RenewRequest& request) = 0;
  virtual absl::StatusOr<v1::ReportResponse> report(const v1::ReportRequest& request) = 0;

  // Ends a lease() under way, which then answers CANCELLED. What it was granted at that moment can still be had: by the
  // same request again.
  virtual void end_polls() = 0;
  // Ends every call under way and refuses all later ones, with CANCELLED.
  virtual void abandon() = 0;
};

// Over gRPC. Errors: as link::dial().
absl::StatusOr<std::unique_ptr<Coordinator>> dial(const link::Address& address);

}  // namespace drover::session
