#include "study/units.h"

#include <gtest/gtest.h>

namespace drover::study {
namespace {

double turned(const char* from, const char* to, double value) {
  const auto conversion = Units::shared().conversion(from, to);
  EXPECT_TRUE(conversion.ok()) << from << " to " << to << ": " << conversion.status();
  return conversion.ok() ? conversion->apply(value) : 0.0;
}

// Exact by definition (BIPM, The International System of Units, 9th edition 2019; inch: agreement of 1959).
TEST(Units, AreConvertedByTheirDefinitions) {
  EXPECT_EQ(turned("bar", "MPa", 16.0), 1.6);
  EXPECT_DOUBLE_EQ(turned("mm", "m", 350.0), 0.35);
  EXPECT_DOUBLE_EQ(turned("degC", "K", 20.0), 293.15);
  EXPECT_DOUBLE_EQ(turned("inch", "mm", 1.0), 25.4);
  EXPECT_DOUBLE_EQ(turned("h", "s", 1.0), 3600.0);
  EXPECT_DOUBLE_EQ(turned("kW.h", "MJ", 1.0), 3.6);
}

TEST(Units, ThatAreEqualOrNotDeclaredChangeNoBit) {
  EXPECT_TRUE(Units::shared().conversion("EUR/a", "EUR/a")->identity());
  EXPECT_TRUE(Units::shared().conversion("", "MPa")->identity());
  EXPECT_TRUE(Units::shared().conversion("MPa", "")->identity());
}

TEST(Units, OfAnotherDimensionAreRefusedByName) {
  const absl::Status refused = Units::shared().conversion("bar", "m").status();
  EXPECT_TRUE(absl::IsInvalidArgument(refused));
  EXPECT_NE(refused.message().find("\"bar\" does not match \"m\""), absl::string_view::npos) << refused;
  EXPECT_FALSE(Units::shared().parse("metres per fortnigth").ok());
}

TEST(Units, InWrongCapitalsHaveANearest) { EXPECT_EQ(Units::nearest_unit("mpa"), "MPa"); }

}  // namespace
}  // namespace drover::study
