#include "study/formula.h"

#include <gtest/gtest.h>

#include <cmath>

#include "study/limits.h"

namespace drover::study {
namespace {

const std::vector<std::string> kNames = {"power", "annual_cost", "x"};

double value_of(const std::string& text) {
  const auto formula = Formula::compile(text, kNames);
  EXPECT_TRUE(formula.ok()) << text << ": " << formula.status();
  return formula.ok() ? formula->evaluate(std::vector<double>{500.0, 100.0, 2.0}).value_or(NAN) : NAN;
}

TEST(Formula, ComputesAsWritten) {
  EXPECT_DOUBLE_EQ(value_of("0.11 * 8.76 * power - annual_cost"), 0.11 * 8.76 * 500.0 - 100.0);
  EXPECT_DOUBLE_EQ(value_of("2 ^ 3 ^ 2"), 512.0) << "powers bind to the right";
  EXPECT_DOUBLE_EQ(value_of("x > 1 ? sqrt(power / 5) : 0"), 10.0);
  EXPECT_DOUBLE_EQ(value_of("min(3, x, 7) + max(1, 2) + abs(-1)"), 5.0);
  EXPECT_DOUBLE_EQ(value_of("ln(exp(x))"), 2.0);
}

TEST(Formula, NamesWhatItDoesNotKnowAndWhatIsNearest) {
  const absl::Status unknown = Formula::compile("powre * 2", kNames).status();
  EXPECT_TRUE(absl::IsInvalidArgument(unknown));
  EXPECT_NE(unknown.message().find("powre"), absl::string_view::npos) << unknown;
  EXPECT_EQ(Formula::unknown_name(unknown), "powre");
}

TEST(Formula, IsRefusedWhenItIsNone) {
  for (const char* const text : {"", "1 +", "(1", "x = 3", "power annual_cost", "\"text\"", "1, 2"}) {
    EXPECT_TRUE(absl::IsInvalidArgument(Formula::compile(text, kNames).status())) << text;
  }
}

TEST(Formula, IsRefusedBeyondItsLimits) {
  EXPECT_FALSE(Formula::compile(std::string(kMostFormulaLength + 1, '1'), kNames).ok());
  const auto nested = [](int depth) {
    return std::string(static_cast<std::size_t>(depth), '(') + "x" + std::string(static_cast<std::size_t>(depth), ')');
  };
  EXPECT_TRUE(Formula::compile(nested(kMostFormulaDepth), kNames).ok());
  EXPECT_FALSE(Formula::compile(nested(kMostFormulaDepth + 1), kNames).ok());
}

TEST(Formula, SaysWhenItsValueIsNotFinite) {
  const auto formula = Formula::compile("1 / (x - 2)", kNames);
  ASSERT_TRUE(formula.ok());
  EXPECT_TRUE(absl::IsOutOfRange(formula->evaluate(std::vector<double>{0, 0, 2}).status()));
  EXPECT_TRUE(absl::IsInvalidArgument(formula->evaluate(std::vector<double>{0, 0}).status()));
}

}  // namespace
}  // namespace drover::study
