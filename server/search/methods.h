// The methods by name.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"
#include "search/method.h"
#include "search/space.h"

namespace drover::search {

// What a study gets that names none.
inline constexpr std::string_view kDefaultMethod = "leapfrogging";

// Sorted.
std::vector<std::string> method_names();

// NOT_FOUND: no method of that name. INVALID_ARGUMENT: settings out of range.
absl::StatusOr<std::unique_ptr<SearchMethod>> make_method(const Space& space, const Settings& settings);

}  // namespace drover::search
