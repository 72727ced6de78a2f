#include "search/methods.h"

#include <array>

#include "absl/strings/str_cat.h"
#include "search/leapfrogging.h"
#include "search/space_filling.h"

namespace drover::search {
namespace {

struct Entry {
  const char* name;
  std::unique_ptr<SearchMethod> (*make)(const Space&, const Settings&);
};

template <class Method>
std::unique_ptr<SearchMethod> make(const Space& space, const Settings& settings) {
  return std::make_unique<Method>(space, settings);
}

// Sorted by name.
constexpr std::array kMethods = {Entry{"leapfrogging", make<Leapfrogging>}, Entry{"space-filling", make<SpaceFilling>}};

constexpr int kMostPlayers = 1'000'000;

absl::Status check(const Settings& settings) {
  if (settings.parallel < 1 || settings.parallel > kMostPlayers) {
    return absl::InvalidArgumentError(absl::StrCat("parallel is not between 1 and ", kMostPlayers));
  }
  if (settings.population < 0 || settings.population > kMostPlayers) {
    return absl::InvalidArgumentError(absl::StrCat("population is not between 0 and ", kMostPlayers));
  }
  if (!(settings.tolerance >= 0.0 && settings.tolerance < 1.0)) {
    return absl::InvalidArgumentError("tolerance is no share of the range below 1");
  }
  if (!(settings.share >= 0.0 && settings.share <= 1.0))
    return absl::InvalidArgumentError("share is not between 0 and 1");
  return absl::OkStatus();
}

}  // namespace

std::vector<std::string> method_names() {
  std::vector<std::string> names;
  for (const Entry& entry : kMethods) names.emplace_back(entry.name);
  return names;
}

absl::StatusOr<std::unique_ptr<SearchMethod>> make_method(const Space& space, const Settings& settings) {
  if (const absl::Status sound = check(settings); !sound.ok()) return sound;
  for (const Entry& entry : kMethods) {
    if (entry.name == settings.method) return entry.make(space, settings);
  }
  return absl::NotFoundError(absl::StrCat("no search method named ", settings.method));
}

}  // namespace drover::search
