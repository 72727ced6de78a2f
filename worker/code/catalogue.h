// All codes that a worker offers.
#pragma once

#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "code/definition.h"

namespace drover::code {

struct Catalogue {
  std::vector<Definition> codes;      // by name
  std::vector<std::string> problems;  // of definitions that are wrong; one or more lines each
  const Definition* find(const std::string& name) const;
};

// Every subfolder of `folder` that holds a code.toml. One wrong definition does not hide the others. NOT_FOUND: no such
// folder.
absl::StatusOr<Catalogue> read_catalogue(const std::string& folder);

}  // namespace drover::code
