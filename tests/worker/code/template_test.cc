#include "code/template.h"

#include <gtest/gtest.h>

#include <random>

namespace drover::code {
namespace {

v1::NamedValue number(double value) {
  v1::NamedValue made;
  made.set_number(value);
  return made;
}

v1::NamedValue text(const std::string& value) {
  v1::NamedValue made;
  made.set_text(value);
  return made;
}

TEST(Template, PutsValuesInTheirPlace) {
  const auto parsed = Template::parse("[=x=] and [= y =]\n[=x=]", {}, {});
  ASSERT_TRUE(parsed.ok());
  EXPECT_EQ(parsed->names(), (std::vector<std::string>{"x", "y"}));
  EXPECT_EQ(parsed->place_of("y"), std::pair(1, 11));
  EXPECT_EQ(*parsed->render({{"x", number(0.1)}, {"y", number(3)}}, {}), "0.1 and 3\n0.1");
}

TEST(Template, NeverLooksForMarksInWhatItPutIn) {
  const auto parsed = Template::parse("[=name=] [=x=]", {}, {});
  EXPECT_EQ(*parsed->render({{"name", text("[=x=]")}, {"x", number(1)}}, {}), "[=x=] 1");
}

TEST(Template, KnowsOtherMarks) {
  const auto parsed = Template::parse("a[=b=] <<x>>", {.open = "<<", .close = ">>"}, {});
  EXPECT_EQ(*parsed->render({{"x", number(2)}}, {}), "a[=b=] 2");
}

TEST(Template, SaysWhereAMarkIsBroken) {
  EXPECT_EQ(Template::parse("ok\n  [=x", {}, {}).status().message(),
            "line 2, column 3: [= without a name and =] after it");
  EXPECT_FALSE(Template::parse("[==]", {}, {}).ok());
  EXPECT_FALSE(Template::parse("[=x\n=]", {}, {}).ok());
}

TEST(Template, RefusesAValueThatDoesNotFitItsField) {
  const auto parsed = Template::parse("[=x=]", {}, {{"x", {.conversion = "%6.1f", .width = 6}}});
  EXPECT_EQ(*parsed->render({{"x", number(12.34)}}, {}), "  12.3");
  EXPECT_TRUE(absl::IsOutOfRange(parsed->render({{"x", number(123456.0)}}, {}).status()));
  EXPECT_TRUE(absl::IsNotFound(parsed->render({}, {}).status()));
}

TEST(Template, CallsChoicesAsTheDeckDoes) {
  const auto parsed = Template::parse("[=steel=]", {}, {});
  EXPECT_EQ(*parsed->render({{"steel", text("S355")}}, {{"steel", {{"S355", "MAT 2"}}}}), "MAT 2");
}

TEST(Format, IsOneHarmlessConversion) {
  for (const char* const good : {"%d", "%5d", "%-8.3e", "%+G", "%012.5e", "% .2f"}) {
    EXPECT_TRUE(check_format({.conversion = good}).ok()) << good;
  }
  for (const char* const bad :
       {"", "%s", "%n", "%d %d", "x%d", "%*d", "%ld", "%", "%%", "%1000000d", "%.999f", "%hn"}) {
    EXPECT_EQ(check_format({.conversion = bad}).ok(), std::string(bad).empty()) << bad;
  }
}

TEST(Format, OfWholeNumbersRefusesFractions) {
  EXPECT_EQ(*format_number(3.0, {.conversion = "%03d"}), "003");
  EXPECT_TRUE(absl::IsOutOfRange(format_number(3.5, {.conversion = "%d"}).status()));
}

TEST(Format, OfNoConversionReadsBackAsTheSameNumber) {
  std::mt19937_64 random(5);
  for (int n = 0; n < 10'000; ++n) {
    const double value = std::ldexp(static_cast<double>(random()), static_cast<int>(random() % 600) - 330);
    EXPECT_EQ(std::strtod(format_number(value, {})->c_str(), nullptr), value);
  }
}

}  // namespace
}  // namespace drover::code
