// The one translation between our errors and gRPC's. Codes are equal in number; details travel as
// drover.v1.ErrorDetail.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include <grpcpp/support/status.h>

#include "absl/status/status.h"
#include "drover/v1/problem.pb.h"

namespace drover::link {

inline constexpr std::string_view kErrorDetailUrl = "type.googleapis.com/drover.v1.ErrorDetail";

// All seventeen codes pass both ways. The message is cleaned to valid UTF-8; a payload under kErrorDetailUrl goes along
// as the status's details, and comes back as a payload.
grpc::Status to_grpc(const absl::Status& status);
absl::Status from_grpc(const grpc::Status& status);

// The details, where there are any.
std::optional<v1::ErrorDetail> error_detail(const absl::Status& status);
// The stable word for programs ("NO_SUCH_SESSION"); empty: none.
std::string error_reason(const absl::Status& status);

}  // namespace drover::link
