// A simulation program as its worker's owner defines it: `code.toml` in a folder of its own (docs/code-file.md).
#pragma once

#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "code/template.h"
#include "drover/v1/code.pb.h"

namespace drover::code {

struct Input {
  std::string writes;  // file in the run's folder
  Template text;
};

// How one output is read.
struct OutputReader {
  std::string name, unit, file;
  std::string after;        // the first number after this text; empty: by line and column
  int match = 1;            // ... after its n-th occurrence
  std::int64_t line = 0;    // 1-based
  int column = 0;           // 1-based, of blank-separated fields
};

struct Definition {
  std::string name, version;
  std::string digest;   // lower-case hexadecimal SHA-256 over everything that decides what runs
  std::string folder;   // absolute
  std::vector<std::string> command;  // command[0] absolute
  absl::Duration time_limit, grace;
  int cores = 1;
  std::int64_t memory_bytes = 0;  // 0: not declared
  std::map<std::string, std::int32_t> licences;
  std::map<std::string, std::string> environment;  // set for each run
  std::vector<std::string> inherit;                // names taken over from the worker's own
  std::vector<std::string> path;                   // absolute folders
  std::vector<std::string> files;                  // copied into each run's folder
  std::vector<v1::Accepted> accepts;
  std::map<std::string, std::map<std::string, std::string>> texts;  // by input: choice -> text in the deck
  std::vector<Input> inputs;
  std::vector<OutputReader> outputs;
  std::vector<int> healthy_exit_codes = {0};
  std::vector<std::string> absent;  // texts that mean failure

  v1::CodeDefinition to_proto() const;
};

// Reads FOLDER/code.toml and all it names. INVALID_ARGUMENT: everything that is wrong, one problem a line,
// 'file:line:column: what; what to do'. NOT_FOUND: there is no such file.
absl::StatusOr<Definition> read_definition(const std::string& folder);

}  // namespace drover::code
