// Whether a study file still says what its study was started with.
#pragma once

#include <string>
#include <vector>

#include "drover/v1/study.pb.h"

namespace drover::commands {

struct ChangedField {
  std::string field;  // a path in the words of the study file: "variable[2].low"
  std::string now;    // as the file has it; empty: it has nothing there
  std::string then;   // as the study was started with; empty: nothing
};

// Compares what the author wrote now with the effective spec of the running study. What an author leaves out is
// compared with the contract's default where it has one, and not at all where the coordinator chooses (seed, method,
// parallel, look_ahead, population, tolerance, share, weights, a constraint's scale, units).
std::vector<ChangedField> changed_fields(const v1::StudySpec& written, const v1::StudySpec& stored);

}  // namespace drover::commands
