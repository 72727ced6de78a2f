#include "absl/strings/cord.h"
#include "absl/strings/str_cat.h"
#include "ledger/handlers.h"

namespace drover::ledger {
namespace {

// Under this name the edge finds the detail and carries it on (proto/link/status.h).
constexpr char kDetail[] = "type.googleapis.com/drover.v1.ErrorDetail";

absl::Status with_detail(absl::Status status, const v1::ErrorDetail& detail) {
  status.SetPayload(kDetail, absl::Cord(detail.SerializeAsString()));
  return status;
}

}  // namespace

absl::Status refusal(absl::StatusCode code, const std::string& reason, const std::string& message) {
  v1::ErrorDetail detail;
  detail.set_reason(reason);
  return with_detail(absl::Status(code, message), detail);
}

absl::Status problems_refusal(const std::vector<v1::Problem>& problems) {
  v1::ErrorDetail detail;
  detail.set_reason("STUDY_HAS_PROBLEMS");
  std::string message = problems.size() == 1 ? "the study has a problem:" : "the study has problems:";
  for (const v1::Problem& problem : problems) {
    *detail.add_problems() = problem;
    absl::StrAppend(&message, "\n  ", problem.field(), ": ", problem.text());
    if (!problem.advice().empty()) absl::StrAppend(&message, "; ", problem.advice());
  }
  return with_detail(absl::InvalidArgumentError(message), detail);
}

}  // namespace drover::ledger
