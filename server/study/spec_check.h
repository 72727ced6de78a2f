// Whether a study could start: its spec compared with itself and with the definition of its code.
#pragma once

#include <cstdint>
#include <span>
#include <vector>

#include "absl/time/time.h"
#include "drover/v1/code.pb.h"
#include "drover/v1/problem.pb.h"
#include "drover/v1/study.pb.h"

namespace drover::study {

// One combination of condition values, a cell; its index in a list of all is the condition index of runs and scores.
// (study::Cell is the message that keeps it in an event.)
struct CellValues {
  std::vector<double> values;  // one a condition of the spec, in the study's units
  double weight = 1.0;         // the weights of all cells add up to 1
};

// What a spec is checked against. Borrowed for the call.
struct CheckContext {
  // Every definition that workers have brought, oldest first. Of several by one name the last one counts.
  std::span<const v1::CodeDefinition> codes;
  int slots = 0;                 // that workers offer for the code now; becomes `parallel`
  std::uint64_t fresh_seed = 0;  // becomes the study's seed where it names none
  absl::Time now;
};

struct CheckResult {
  // Everything that is wrong, in the order of the study file: at most kMostProblems, each with its `field` in the words
  // of the study file and 0-based indices ("variable[2].low"). Empty: the study could start.
  std::vector<v1::Problem> problems;
  // The spec with everything filled in that its author left open: study code and its digest, kinds, scales, weights
  // (adding up to 1 for each condition), senses, `across`, constraint scales, replicates, method, seed, order,
  // parallel, look_ahead. 0 stays in population, tolerance and share: the method's own default. Empty when there are
  // problems.
  v1::StudySpec effective;
  // The last condition varies fastest. One cell without values where the spec has no conditions; empty when there are
  // problems.
  std::vector<CellValues> cells;
  int runs_per_candidate = 0;  // cells x replicates; 0 when there are problems
};

// Never fails: what is wrong is the answer. Units are compared where both sides declare one; a unit on one side alone
// is a label. A spec that was effective once passes unchanged against the same code (its deadline aside).
CheckResult check_spec(const v1::StudySpec& spec, const CheckContext& context);

// The definition that `spec` runs: by its digest where it has one, else the last of its name. Null: there is none.
const v1::CodeDefinition* find_code(const v1::StudySpec& spec, std::span<const v1::CodeDefinition> codes);

}  // namespace drover::study
