// What a person may have meant by a name that is not known.
#pragma once

#include <span>
#include <string>
#include <string_view>

namespace drover::study {

// How many insertions, deletions, changes and swaps of neighbours turn `a` into `b`, byte by byte (Damerau 1964,
// Communications of the ACM 7, 171-176, in the restricted form that edits no part twice). O(|a| |b|).
int edit_distance(std::string_view a, std::string_view b);

// The candidate nearest to `text`, capitals aside; empty when none is near enough to be a slip of the fingers (more
// than a third of the letters differ, or `text` is longer than any name may be). Of equally near ones the first.
std::string nearest(std::string_view text, std::span<const std::string> candidates);

// A letter or '_', then letters, digits and '_': the names that a formula can use.
bool is_identifier(std::string_view name);

}  // namespace drover::study
