// What a person may have meant by a name that is not known.
#pragma once

#include <cstddef>
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

// 'penstock, runner and valve'; at most `most` of them, then 'and 7 more'. For messages.
std::string listed(std::span<const std::string> names, int most = 12);

// `text` in double quotes for a message: clipped to 100 bytes, control characters and broken UTF-8 as '?', so that it
// can neither upset a terminal nor make a message that cannot be sent.
std::string quoted(std::string_view text);
// The same without quotes, clipped to `most` bytes.
std::string printable(std::string_view text, std::size_t most = 1'000);

// A letter or '_', then letters, digits and '_': the names that a formula can use.
bool is_identifier(std::string_view name);

}  // namespace drover::study
