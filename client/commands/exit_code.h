// How a command ends, for those who call it from scripts. There are no other codes.
#pragma once

#include "absl/status/status.h"

namespace drover::commands {

enum class Exit {
  kDone = 0,
  kNo = 1,           // the answer is no, or the study failed
  kWrongInput = 2,   // wrong usage, or a study file that cannot be used
  kUnreachable = 3,  // no coordinator answers
};

// INVALID_ARGUMENT, NOT_FOUND, ALREADY_EXISTS and OUT_OF_RANGE mean that the input was wrong, UNAVAILABLE and
// DEADLINE_EXCEEDED that the coordinator cannot be reached; everything else but OK is a no.
Exit exit_for(const absl::Status& status);

}  // namespace drover::commands
