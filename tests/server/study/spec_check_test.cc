#include "study/spec_check.h"

#include <gtest/gtest.h>

#include <functional>

#include "server/study/made_spec.h"
#include "study/limits.h"

namespace drover::study {
namespace {

TEST(SpecCheck, FillsInWhatWasLeftOpen) {
  const CheckResult checked = check_beam(beam_study());
  ASSERT_TRUE(checked.problems.empty()) << checked.problems.front().field() << ": " << checked.problems.front().text();
  const v1::StudySpec& spec = checked.effective;
  EXPECT_EQ(spec.codes(0).digest(), "c0de");
  EXPECT_EQ(spec.search().method(), "leapfrogging");
  EXPECT_EQ(spec.search().seed(), 42u);
  EXPECT_EQ(spec.search().parallel(), 3);
  EXPECT_EQ(spec.replicates(), 1);
  EXPECT_EQ(spec.objectives(0).sense(), v1::SENSE_MINIMISE);
  EXPECT_EQ(spec.objectives(0).across(), v1::ACROSS_MEAN);
  EXPECT_EQ(spec.constraints(0).across(), v1::ACROSS_WORST);
  ASSERT_EQ(checked.cells.size(), 2u);
  EXPECT_DOUBLE_EQ(checked.cells[0].weight, 0.75);
  EXPECT_EQ(checked.runs_per_candidate, 2);
}

TEST(SpecCheck, FixesTheWindowOfCandidateOrder) {
  v1::StudySpec spec = beam_study();
  spec.mutable_search()->set_order(v1::ORDER_CANDIDATE);
  const CheckResult checked = check_beam(spec);
  EXPECT_EQ(checked.effective.search().parallel(), 4) << "not the slots of today";
  EXPECT_EQ(checked.effective.search().look_ahead(), 16);
}

struct Wrong {
  const char* what;
  std::function<void(v1::StudySpec&)> make;
  const char* field;
  const char* word;
  const char* nearest;
};

class WrongSpec : public testing::TestWithParam<Wrong> {};

TEST_P(WrongSpec, IsAProblemOfItsField) {
  v1::StudySpec spec = beam_study();
  GetParam().make(spec);
  const CheckResult checked = check_beam(spec);
  ASSERT_FALSE(checked.problems.empty());
  const v1::Problem& problem = checked.problems.front();
  EXPECT_EQ(problem.field(), GetParam().field) << problem.text();
  EXPECT_NE(problem.text().find(GetParam().word), std::string::npos) << problem.text();
  EXPECT_EQ(problem.nearest(), GetParam().nearest);
}

const Wrong kWrong[] = {
    {"no name", [](auto& s) { s.clear_name(); }, "study.name", "no name", ""},
    {"a name with a blank", [](auto& s) { s.set_name("a b"); }, "study.name", "a b", ""},
    {"an unknown code", [](auto& s) { s.mutable_codes(0)->set_code("baem"); }, "study.code", "baem", "beam"},
    {"low above high", [](auto& s) { s.mutable_variables(0)->set_low(9); }, "variable[0].low", "9", ""},
    {"a unit of another dimension", [](auto& s) { s.mutable_variables(0)->set_unit("kg"); }, "variable[0].unit", "kg",
     ""},
    {"an unknown unit", [](auto& s) { s.mutable_variables(0)->set_unit("furlogs"); }, "variable[0].unit", "furlogs",
     ""},
    {"a step of 0", [](auto& s) { s.mutable_variables(0)->set_step(0); }, "variable[0].step", "step", ""},
    {"a variable the code does not accept", [](auto& s) { s.mutable_variables(0)->set_name("hieght"); },
     "variable[0].name", "hieght", "height"},
    {"a choice the code does not accept", [](auto& s) { s.mutable_variables(1)->set_choices(0, "woad"); },
     "variable[1].choices", "woad", "wood"},
    {"a condition without values", [](auto& s) { s.mutable_conditions(0)->clear_values(); }, "condition[0].values",
     "value", ""},
    {"a negative weight", [](auto& s) { s.mutable_conditions(0)->set_weights(0, -1); }, "condition[0].weights", "-1",
     ""},
    {"a formula that uses an unknown name", [](auto& s) { s.mutable_derived(0)->set_formula("masss"); },
     "derived[0].formula", "masss", "mass"},
    {"an objective that is no output", [](auto& s) { s.mutable_objectives(0)->set_name("cots"); },
     "objective[0].minimise", "cots", "cost"},
    {"no objective", [](auto& s) { s.clear_objectives(); }, "objective", "", ""},
    {"a constraint that is no output", [](auto& s) { s.mutable_constraints(0)->set_name("deflexion"); },
     "constraint[0].output", "deflexion", "deflection"},
    {"a constraint without a limit", [](auto& s) { s.mutable_constraints(0)->clear_at_most(); }, "constraint[0].output",
     "no limit", ""},
    {"an unknown method", [](auto& s) { s.mutable_search()->set_method("leapfrog"); }, "search.method", "leapfrog",
     "leapfrogging"},
    {"a budget for less than one candidate", [](auto& s) { s.mutable_budget()->set_runs(1); }, "budget.runs", "2", ""},
    {"a deadline that has passed", [](auto& s) { s.mutable_budget()->mutable_deadline()->set_seconds(1'000'000'000); },
     "budget.deadline", "passed", ""},
};

INSTANTIATE_TEST_SUITE_P(Table, WrongSpec, testing::ValuesIn(kWrong), [](const auto& row) {
  std::string name = row.param.what;
  for (char& c : name) c = std::isalnum(static_cast<unsigned char>(c)) ? c : '_';
  return name;
});

TEST(SpecCheck, FindsAllProblemsAtOnceInTheOrderOfTheFile) {
  v1::StudySpec spec = beam_study();
  spec.set_name("");
  spec.mutable_variables(0)->set_unit("kg");
  spec.mutable_search()->set_method("none");
  const CheckResult checked = check_beam(spec);
  ASSERT_EQ(checked.problems.size(), 3u);
  EXPECT_EQ(checked.problems[0].field(), "study.name");
  EXPECT_EQ(checked.problems[2].field(), "search.method");
  EXPECT_TRUE(checked.cells.empty());
}

TEST(SpecCheck, HoldsSpecsToTheirLimits) {
  v1::StudySpec spec = beam_study();
  spec.set_name(std::string(kMostNameLength, 'a'));
  EXPECT_TRUE(check_beam(spec).problems.empty());
  spec.set_name(std::string(kMostNameLength + 1, 'a'));
  EXPECT_FALSE(check_beam(spec).problems.empty());
}

TEST(SpecCheck, OfAnEmptySpecIsAnAnswerAndNoCrash) { EXPECT_FALSE(check_beam(v1::StudySpec()).problems.empty()); }

}  // namespace
}  // namespace drover::study
