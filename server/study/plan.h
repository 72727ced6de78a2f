// A study made ready to run: its space, its cells, what a run gets, and what a candidate is worth.
#pragma once

#include <cstdint>
#include <memory>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"
#include "drover/v1/attempt.pb.h"
#include "drover/v1/code.pb.h"
#include "drover/v1/study.pb.h"
#include "search/method.h"
#include "search/space.h"
#include "study/events.pb.h"
#include "study/spec_check.h"

namespace drover::study {

// How one run of a candidate settled.
struct RunResult {
  int condition = 0;         // index of the cell
  int replicate = 0;         // 0-based
  v1::AttemptReport report;  // that settled it: EVALUATED, FAILED or BOUNDED
};

// What an effective spec (check_spec) means, once and for all runs of the study.
//
// `values` below are one number a variable, in the study's units, on their steps; of a choice its index. Immutable, and
// safe from several threads (formulas are serialised inside). Nothing depends on the locale, on time or on order of
// calls.
class StudyPlan {
 public:
  // `codes` must hold the definition that the spec's digest names, `cells` are those of check_spec (after a restart:
  // of the StudyStarted event). INVALID_ARGUMENT when the three do not fit together, which they do when they come from
  // one check_spec without problems. The arguments are copied.
  static absl::StatusOr<std::unique_ptr<StudyPlan>> make(const v1::StudySpec& effective,
                                                         std::span<const v1::CodeDefinition> codes,
                                                         std::span<const CellValues> cells);
  StudyPlan(const StudyPlan&) = delete;
  StudyPlan& operator=(const StudyPlan&) = delete;
  ~StudyPlan();

  const v1::StudySpec& spec() const;
  const v1::CodeDefinition& code() const;
  const search::Space& space() const;
  const search::Settings& settings() const;
  std::span<const CellValues> cells() const;
  int replicates() const;
  int runs_per_candidate() const;  // cells x replicates

  // Rounds to steps and integers, once: everything that a run gets is made from these numbers.
  std::vector<double> user_values(const search::Point& point) const;

  // For people: with the study's units, choices as texts, in the spec's order.
  std::vector<v1::NamedValue> named_values(std::span<const double> values) const;
  std::vector<v1::NamedValue> condition_values(int cell) const;

  // What the code is given under a cell: variables and conditions in the code's own units, sorted by name.
  std::vector<v1::NamedValue> inputs(std::span<const double> values, int cell) const;

  // What a candidate is worth. `runs` are its settled runs, in any order; a run that is missing, or whose report
  // settles nothing, was withdrawn. The first of two reports on one run counts; one on no run of the study is passed
  // over.
  //
  // Each run: outputs as reported, in the code's units; derived numbers from variables and conditions (study's units),
  // outputs (code's units) and earlier derived numbers; then objectives and constraints take their unit where they
  // declare one. Each condition: the mean over replicates. Across conditions: `mean` is weighted; `worst` is the worst
  // in the objective's sense or nearest to breaking the constraint; `quantile` q is the least bad value such that the
  // values as bad or worse weigh at least q (the inverse of the weighted empirical distribution: definition 1 of
  // Hyndman and Fan 1996, The American Statistician 50, 361-365).
  //
  // Constraints: the limit moves to the safe side by allowance x |limit|; the violation is what exceeds it, divided by
  // `scale`; violations add up (Deb 2000, Computer Methods in Applied Mechanics and Engineering 186, 311-338).
  //
  // FAILED when a run failed, was stopped early, lacks an output, or a formula gives no finite number (the last three
  // are of kind CHECK): kind and reason are those of the first such run by condition and replicate, 'condition 2
  // (river_flow = 0.35 m3/s): ...' (1-based, for people). Else WITHDRAWN when a run was withdrawn. Objectives are
  // minimised (negated where the sense is MAXIMISE).
  CandidateScore score(std::span<const double> values, std::span<const RunResult> runs) const;

  // What the method learns. INVALID_ARGUMENT when the score's bytes are no score of this study.
  absl::StatusOr<search::Outcome> to_outcome(const search::Ask& ask, const CandidateScore& score) const;

  // For people: in the user's sense and unit. Empty unless evaluated.
  std::vector<v1::NamedValue> shown_objectives(const CandidateScore& score) const;
  std::vector<v1::NamedValue> shown_constraints(const CandidateScore& score) const;

  // What a candidate did under one cell: outputs (the code's units) and derived numbers, each the mean over the
  // replicates that were evaluated; numbers that no replicate gave are left out. `runs` of other cells are passed over.
  v1::CellResult cell_result(std::span<const double> values, int cell, std::span<const RunResult> runs) const;

  // Whether `a` comes before `b` by the feasibility rules of Deb (2000): feasible before infeasible before failed
  // before withdrawn; of two feasible ones the smaller (first) objective, of two infeasible ones the smaller violation.
  // Strict: a tie is false, so whoever came earlier stays.
  static bool better(const CandidateScore& a, const CandidateScore& b);

  // SHA-256 (32 bytes) of what a run is: the code's digest, the inputs in their order and the replicate, in an encoding
  // that no two different runs share and that does not change between versions.
  static std::string input_digest(std::string_view code_digest, std::span<const v1::NamedValue> inputs, int replicate);

  // SHA-256 (32 bytes) of the values as they are kept (pack_doubles).
  static std::string candidate_digest(std::span<const double> values);

 private:
  struct Parts;
  explicit StudyPlan(std::unique_ptr<Parts> parts);
  // Objectives, constraints and verdict from the means of each cell.
  CandidateScore judge(CandidateScore score, const std::vector<std::vector<double>>& means) const;
  std::unique_ptr<Parts> parts_;
};

}  // namespace drover::study
