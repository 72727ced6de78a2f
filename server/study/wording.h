// How names, numbers and lists are put into messages.
#pragma once

#include <cstddef>
#include <span>
#include <string>
#include <string_view>

namespace drover::study {

// `text` in double quotes for a message: clipped to 100 bytes, control characters and broken UTF-8 as '?', so that it
// can neither upset a terminal nor make a message that cannot be sent.
std::string quoted(std::string_view text);
// The same without quotes, clipped to `most` bytes.
std::string printable(std::string_view text, std::size_t most = 1'000);

// 'penstock, runner and valve'; at most `most` of them, then 'and 7 more'.
std::string listed(std::span<const std::string> names, int most = 12);

// The shortest text that reads back as the same number: "0.1", "1e-09", "nan".
std::string number_text(double value);

}  // namespace drover::study
