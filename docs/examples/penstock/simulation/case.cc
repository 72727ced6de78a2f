#include "case.h"

#include <algorithm>

namespace penstock {

const SteelGrade& Case::grade() const {
  return *std::find_if(grades.begin(), grades.end(), [this](const SteelGrade& one) { return one.name == steel; });
}

double Case::elevation_m(double station_m) const {
  const auto after = std::find_if(profile.begin(), profile.end(),
                                  [station_m](const ProfilePoint& one) { return one.station_m >= station_m; });
  if (after == profile.begin()) return profile.front().elevation_m;
  if (after == profile.end()) return profile.back().elevation_m;
  const ProfilePoint& before = *(after - 1);
  const double share = (station_m - before.station_m) / (after->station_m - before.station_m);
  return before.elevation_m + share * (after->elevation_m - before.elevation_m);
}

}  // namespace penstock
