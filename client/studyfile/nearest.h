// What a person may have meant by a word that is not known.
#pragma once

#include <span>
#include <string>
#include <string_view>

namespace drover::studyfile {

// How many insertions, deletions, changes and swaps of neighbouring bytes turn `a` into `b`, where no part is edited
// twice (Damerau 1964, Communications of the ACM 7, 171-176). O(|a| |b|).
int slips(std::string_view a, std::string_view b);

// The known word nearest to `word`, capitals aside; the first of equally near ones. Empty when none is near: more than
// a third of the longer word's letters (of short words: one letter) would have to change.
std::string nearest(std::string_view word, std::span<const std::string> known);

}  // namespace drover::studyfile
