// A study and its designs in plain words and tables, for people.
#pragma once

#include <optional>
#include <string>

#include "absl/time/time.h"
#include "drover/v1/studies.pb.h"
#include "screen/screen.h"

namespace drover::commands {

// State, sentence, runs by state, best design, losses, workers: some lines, each with its end.
std::string describe(const v1::Study& study, absl::Time now, const screen::Screen& screen);

// One design: its values, objectives and constraints with units, and what its conditions gave if that is there. With a
// baseline: its values and numbers beside, and the gain.
std::string describe(const v1::Candidate& candidate, const v1::StudySpec& spec,
                     const std::optional<v1::Candidate>& baseline = std::nullopt);

// "at most 3.8, less 5 %" for a limit; empty when `name` has no constraint.
std::string limits_of(const v1::Constraint& constraint);

bool has_baseline(const v1::StudySpec& spec);  // candidate 1 is today's design

// The study will not go on by itself.
bool is_over(v1::StudyState state);

}  // namespace drover::commands
