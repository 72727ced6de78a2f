#include "commands/exit_code.h"

namespace drover::commands {

Exit exit_for(const absl::Status& status) {
  switch (status.code()) {
    case absl::StatusCode::kOk:
      return Exit::kDone;
    case absl::StatusCode::kInvalidArgument:
    case absl::StatusCode::kNotFound:
    case absl::StatusCode::kAlreadyExists:
    case absl::StatusCode::kOutOfRange:
      return Exit::kWrongInput;
    case absl::StatusCode::kUnavailable:
    case absl::StatusCode::kDeadlineExceeded:
      return Exit::kUnreachable;
    default:
      return Exit::kNo;
  }
}

}  // namespace drover::commands
