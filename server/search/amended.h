// What a change of the bounds makes of points. Internal to this folder.
#pragma once

#include <optional>

#include "absl/status/status.h"
#include "search/space.h"

namespace drover::search {

// INVALID_ARGUMENT: another number of variables, or one of another kind or with other choices.
absl::Status check_amendment(const Space& before, const Space& after);

// The point of `after` with the same values in the user's units; none: they are outside its bounds or off its step.
std::optional<Point> point_in(const Space& after, const Space& before, const Point& point);

}  // namespace drover::search
