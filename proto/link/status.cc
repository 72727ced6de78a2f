#include "link/status.h"

#include "absl/strings/cord.h"
#include "absl/strings/string_view.h"
#include "link/text.h"

namespace drover::link {
namespace {

absl::string_view url() { return {kErrorDetailUrl.data(), kErrorDetailUrl.size()}; }

// The two lists of codes have the same numbers (gRPC, "Status codes and their use").
static_assert(static_cast<int>(absl::StatusCode::kCancelled) == grpc::StatusCode::CANCELLED);
static_assert(static_cast<int>(absl::StatusCode::kUnauthenticated) == grpc::StatusCode::UNAUTHENTICATED);
static_assert(static_cast<int>(absl::StatusCode::kDataLoss) == grpc::StatusCode::DATA_LOSS);

}  // namespace

grpc::Status to_grpc(const absl::Status& status) {
  if (status.ok()) return grpc::Status::OK;
  const absl::optional<absl::Cord> payload = status.GetPayload(url());
  const std::string message = clean_utf8({status.message().data(), status.message().size()});
  return {static_cast<grpc::StatusCode>(status.code()), message, payload ? std::string(*payload) : std::string()};
}

absl::Status from_grpc(const grpc::Status& status) {
  if (status.ok()) return absl::OkStatus();
  absl::Status made(static_cast<absl::StatusCode>(status.error_code()), status.error_message());
  if (!status.error_details().empty()) made.SetPayload(url(), absl::Cord(status.error_details()));
  return made;
}

std::optional<v1::ErrorDetail> error_detail(const absl::Status& status) {
  const absl::optional<absl::Cord> payload = status.GetPayload(url());
  v1::ErrorDetail detail;
  if (!payload || !detail.ParseFromString(std::string(*payload))) return std::nullopt;
  return detail;
}

std::string error_reason(const absl::Status& status) {
  const std::optional<v1::ErrorDetail> detail = error_detail(status);
  return detail ? detail->reason() : std::string();
}

}  // namespace drover::link
