#include "study/names.h"

#include <algorithm>
#include <cstddef>
#include <vector>

#include "absl/strings/ascii.h"
#include "study/limits.h"

namespace drover::study {

int edit_distance(std::string_view a, std::string_view b) {
  std::vector<int> before_last(b.size() + 1);
  std::vector<int> last(b.size() + 1);
  std::vector<int> row(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) last[j] = static_cast<int>(j);
  for (std::size_t i = 1; i <= a.size(); ++i) {
    row[0] = static_cast<int>(i);
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const int change = a[i - 1] == b[j - 1] ? 0 : 1;
      row[j] = std::min({last[j] + 1, row[j - 1] + 1, last[j - 1] + change});
      const bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped) row[j] = std::min(row[j], before_last[j - 2] + 1);
    }
    std::swap(before_last, last);
    std::swap(last, row);
  }
  return last[b.size()];
}

std::string nearest(std::string_view text, std::span<const std::string> candidates) {
  if (text.empty() || text.size() > kMostNameLength) return "";
  const std::string wanted = absl::AsciiStrToLower(std::string(text));
  const std::string* best = nullptr;
  int least = 0;
  for (const std::string& candidate : candidates) {
    if (candidate.empty() || candidate.size() > kMostNameLength) continue;
    const int distance = edit_distance(wanted, absl::AsciiStrToLower(candidate));
    if (best != nullptr && distance >= least) continue;
    best = &candidate;
    least = distance;
  }
  if (best == nullptr) return "";
  const std::size_t letters = std::max(wanted.size(), best->size());
  const bool near = static_cast<std::size_t>(least) * 3 <= letters;
  return near ? *best : "";
}

bool is_identifier(std::string_view name) {
  if (name.empty() || absl::ascii_isdigit(static_cast<unsigned char>(name.front()))) return false;
  return std::all_of(name.begin(), name.end(),
                     [](char c) { return c == '_' || absl::ascii_isalnum(static_cast<unsigned char>(c)); });
}

}  // namespace drover::study
