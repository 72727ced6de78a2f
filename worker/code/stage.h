// Prepares a run's folder: input files from templates, copied files, command and environment.
#pragma once

#include <span>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "code/definition.h"
#include "drover/v1/study.pb.h"

namespace drover::code {

struct Staged {
  std::vector<std::string> command;      // command[0] absolute
  std::vector<std::string> environment;  // "NAME=value", all of it, by name
};

// Writes into `work`, which must be there and empty. INVALID_ARGUMENT: an input is missing, unknown, of the wrong kind
// or does not fit its field; RESOURCE_EXHAUSTED: the disk is full.
absl::StatusOr<Staged> stage(const Definition& definition, std::span<const v1::NamedValue> inputs,
                             const std::string& work);

}  // namespace drover::code
