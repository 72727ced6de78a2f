// Where a worker keeps what it keeps, when nobody says otherwise.
#pragma once

#include <string>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover {

// A worker's name is part of a path and of what people read: 1 to 64 letters, digits, '.', '_' and '-', none of the
// signs first. INVALID_ARGUMENT else.
absl::Status check_worker_name(const std::string& name);

// $XDG_STATE_HOME/drover/worker-<name>, else ~/.local/state/drover/worker-<name>. FAILED_PRECONDITION: neither variable
// holds an absolute path.
absl::StatusOr<std::string> default_spool(const std::string& name);

// A program of Drover's beside this one. NOT_FOUND: there is none that can be run.
absl::StatusOr<std::string> sister_program(const std::string& name);

std::string absolute_path(const std::string& path);

}  // namespace drover
