#include "screen/numbers.h"

#include <gtest/gtest.h>

#include <limits>

namespace drover::screen {
namespace {

TEST(Numbers, AreShortForPeopleAndExactForFiles) {
  EXPECT_EQ(number(345.678901), "345.679");
  EXPECT_EQ(number(4.5), "4.5");
  EXPECT_EQ(number(1e-9), "1e-09");
  EXPECT_EQ(exact(0.1), "0.1");
  EXPECT_EQ(exact(1.0 / 3.0), "0.3333333333333333");
  EXPECT_EQ(whole(0), "0");
  EXPECT_EQ(whole(-999), "-999");
  EXPECT_EQ(whole(-1000), "-1,000");
  EXPECT_EQ(whole(1234567), "1,234,567");
  EXPECT_EQ(whole(std::numeric_limits<std::int64_t>::min()), "-9,223,372,036,854,775,808");
  EXPECT_EQ(counted(1, "run", "runs"), "1 run");
  EXPECT_EQ(counted(1000, "run", "runs"), "1,000 runs");
}

TEST(Numbers, ShowValuesWithTheirUnits) {
  v1::NamedValue named;
  EXPECT_EQ(value(named), "-");
  named.set_number(45.67);
  named.set_unit("kEUR/a");
  EXPECT_EQ(value(named), "45.67 kEUR/a");
  EXPECT_EQ(bare(named), "45.67");
  named.clear_unit();
  named.set_text("S355");
  EXPECT_EQ(value(named), "S355");
}

TEST(Numbers, RoundAnEstimateToWhatItIsWorth) {
  EXPECT_EQ(about(absl::ZeroDuration()), "about 1 s");
  EXPECT_EQ(about(absl::Seconds(42.4)), "about 42 s");
  EXPECT_EQ(about(absl::Seconds(130)), "about 2 min");
  EXPECT_EQ(about(absl::Minutes(204)), "about 3 h 20 min");
  EXPECT_EQ(about(absl::Hours(49) + absl::Minutes(12)), "about 2 d 1 h");
}

}  // namespace
}  // namespace drover::screen
