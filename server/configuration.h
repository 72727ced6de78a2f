// The coordinator's configuration file (TOML, strict):
//
//   [licences]
//   surge = 4                # tokens of a pool; pools that are not named are not counted
//
//   [times]                  # spans as "30s", "2min"... all optional
//   renew_every = "30s"
//   lease = "2m"
#pragma once

#include <cstdint>
#include <map>
#include <string>

#include "absl/status/statusor.h"
#include "dispatch/times.h"

namespace drover {

struct Configuration {
  std::map<std::string, std::int32_t> licences;
  dispatch::Times times;
};

// INVALID_ARGUMENT: "file:line:column: what; what to do". NOT_FOUND: no such file.
absl::StatusOr<Configuration> read_configuration(const std::string& path);

}  // namespace drover
