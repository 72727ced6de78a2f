// How large a study may be. Every limit that check_spec() holds a spec to is here, and nowhere else.
#pragma once

#include <cstddef>
#include <cstdint>

namespace drover::study {

inline constexpr std::size_t kMostNameLength = 100;       // characters of any name
inline constexpr std::size_t kMostUnitLength = 100;       // characters of a unit
inline constexpr std::size_t kMostChoiceLength = 1'000;   // characters of one choice
inline constexpr std::size_t kMostFormulaLength = 4'096;  // characters of a formula
inline constexpr int kMostFormulaDepth = 100;             // nested parentheses
inline constexpr int kMostVariables = 1'000;
inline constexpr int kMostChoices = 1'000;  // of one variable
inline constexpr int kMostConditions = 100;
inline constexpr int kMostCells = 10'000;  // combinations of condition values
inline constexpr int kMostDerived = 1'000;
inline constexpr int kMostObjectives = 100;
inline constexpr int kMostConstraints = 1'000;
inline constexpr int kMostTags = 100;
inline constexpr int kMostReplicates = 1'000;
inline constexpr int kMostRunsPerCandidate = 10'000;                // cells x replicates
inline constexpr double kMostSteps = 1e9;                           // of a stepped or integer variable
inline constexpr double kLargestInteger = 9'007'199'254'740'992.0;  // 2^53: beyond it doubles skip integers
inline constexpr int kMostParallel = 10'000;
inline constexpr int kMostLookAhead = 1'000'000;
inline constexpr int kLeastPopulation = 4;
inline constexpr int kMostPopulation = 100'000;
inline constexpr std::int64_t kMostBudgetRuns = 1'000'000'000;
inline constexpr int kMostProblems = 1'000;        // reported at once
inline constexpr int kMostNearest = 25;            // problems that are given the nearest name
inline constexpr int kCandidateOrderParallel = 4;  // what `parallel` 0 means with order = "candidate"
inline constexpr int kLookAheadPerParallel = 4;    // what `look_ahead` 0 means

}  // namespace drover::study
