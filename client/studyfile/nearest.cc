#include "studyfile/nearest.h"

#include <algorithm>
#include <utility>
#include <vector>

#include "absl/strings/ascii.h"

namespace drover::studyfile {
namespace {

constexpr std::size_t kLongestWord = 200;  // nobody mistypes a longer one

}  // namespace

int slips(std::string_view a, std::string_view b) {
  std::vector<int> before(b.size() + 1), last(b.size() + 1), now(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) last[j] = static_cast<int>(j);
  for (std::size_t i = 1; i <= a.size(); ++i) {
    now[0] = static_cast<int>(i);
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const int changed = last[j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1);
      now[j] = std::min({changed, last[j] + 1, now[j - 1] + 1});
      const bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped) now[j] = std::min(now[j], before[j - 2] + 1);
    }
    std::swap(before, last);
    std::swap(last, now);
  }
  return last[b.size()];
}

std::string nearest(std::string_view word, std::span<const std::string> known) {
  if (word.empty() || word.size() > kLongestWord) return "";
  const std::string plain = absl::AsciiStrToLower(std::string(word));
  std::string found;
  int fewest = 0;
  for (const std::string& name : known) {
    if (name.size() > kLongestWord) continue;
    const int most = std::max(1, static_cast<int>(std::max(name.size(), word.size())) / 3);
    const int count = slips(plain, absl::AsciiStrToLower(name));
    if (count <= most && (found.empty() || count < fewest)) {
      found = name;
      fewest = count;
    }
  }
  return found;
}

}  // namespace drover::studyfile
