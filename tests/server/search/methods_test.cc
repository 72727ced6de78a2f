#include "search/methods.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using testing::make_space;
using testing::real;

TEST(Methods, AreListedByName) {
  const std::vector<std::string> names = method_names();
  EXPECT_TRUE(std::is_sorted(names.begin(), names.end()));
  EXPECT_THAT(names, ::testing::IsSupersetOf({"leapfrogging", "space-filling"}));
  EXPECT_THAT(names, ::testing::Contains(kDefaultMethod));
}

TEST(Methods, AreMadeByTheNamesListed) {
  const Space space = make_space({real(0, 1)});
  for (const std::string& name : method_names()) EXPECT_TRUE(make_method(space, {.method = name}).ok()) << name;
  EXPECT_EQ(make_method(space, {.method = "guessing"}).status().code(), absl::StatusCode::kNotFound);
}

TEST(Methods, RefuseSettingsOutOfRange) {
  const Space space = make_space({real(0, 1)});
  const std::vector<Settings> wrong = {{.parallel = 0},
                                       {.parallel = -1},
                                       {.population = -1},
                                       {.tolerance = -0.1},
                                       {.tolerance = 1.0},
                                       {.tolerance = std::nan("")},
                                       {.share = -0.1},
                                       {.share = 1.1},
                                       {.share = std::nan("")},
                                       {.population = 2'000'000'000},
                                       {.parallel = 2'000'000'000}};
  for (const std::string& name : method_names()) {
    for (std::size_t i = 0; i < wrong.size(); ++i) {
      Settings settings = wrong[i];
      settings.method = name;
      EXPECT_EQ(make_method(space, settings).status().code(), absl::StatusCode::kInvalidArgument) << name << ' ' << i;
    }
  }
}

}  // namespace
}  // namespace drover::search
