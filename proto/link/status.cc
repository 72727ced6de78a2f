#include "link/status.h"

#include "absl/strings/cord.h"
#include "absl/strings/str_cat.h"
#include "link/text.h"

namespace drover::link {
namespace {

// Both travel in the trailing metadata, where the message may take three bytes a byte and the details four for three:
// below the 64 KiB that a channel takes.
constexpr std::size_t kLongestMessage = 4 << 10;
constexpr std::size_t kLongestDetail = 32 << 10;

static_assert(static_cast<int>(absl::StatusCode::kOk) == grpc::StatusCode::OK);
static_assert(static_cast<int>(absl::StatusCode::kCancelled) == grpc::StatusCode::CANCELLED);
static_assert(static_cast<int>(absl::StatusCode::kDataLoss) == grpc::StatusCode::DATA_LOSS);
static_assert(static_cast<int>(absl::StatusCode::kUnauthenticated) == grpc::StatusCode::UNAUTHENTICATED);

// Leaves out problems from the end until the rest may travel, and says how many.
std::string fit(const absl::Cord& payload) {
  std::string bytes(payload);
  if (bytes.size() <= kLongestDetail) return bytes;
  v1::ErrorDetail detail;
  if (!detail.ParseFromString(bytes)) return "";
  int left_out = 0;
  while (detail.problems_size() > 0 && detail.ByteSizeLong() > kLongestDetail) {
    detail.mutable_problems()->RemoveLast();
    (*detail.mutable_metadata())["problems_left_out"] = absl::StrCat(++left_out);
  }
  return detail.ByteSizeLong() > kLongestDetail ? "" : detail.SerializeAsString();
}

}  // namespace

grpc::Status to_grpc(const absl::Status& status) {
  if (status.ok()) return grpc::Status::OK;
  const std::string message = clean_utf8(std::string(status.message().substr(0, kLongestMessage)));
  const auto payload = status.GetPayload({kErrorDetailUrl.data(), kErrorDetailUrl.size()});
  return {static_cast<grpc::StatusCode>(status.code()), message, payload ? fit(*payload) : ""};
}

absl::Status from_grpc(const grpc::Status& status) {
  if (status.ok()) return absl::OkStatus();
  const int code = status.error_code();
  const bool known = code > 0 && code <= static_cast<int>(absl::StatusCode::kUnauthenticated);
  absl::Status made(known ? static_cast<absl::StatusCode>(code) : absl::StatusCode::kUnknown,
                    clean_utf8(status.error_message()));
  if (const std::string details = status.error_details(); !details.empty()) {
    made.SetPayload({kErrorDetailUrl.data(), kErrorDetailUrl.size()}, absl::Cord(details));
  }
  return made;
}

std::optional<v1::ErrorDetail> error_detail(const absl::Status& status) {
  const auto payload = status.GetPayload({kErrorDetailUrl.data(), kErrorDetailUrl.size()});
  v1::ErrorDetail detail;
  if (!payload || !detail.ParseFromString(std::string(*payload))) return std::nullopt;
  return detail;
}

std::string error_reason(const absl::Status& status) {
  const std::optional<v1::ErrorDetail> detail = error_detail(status);
  return detail ? detail->reason() : "";
}

}  // namespace drover::link
