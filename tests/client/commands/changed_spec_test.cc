#include "commands/changed_spec.h"

#include <gtest/gtest.h>

#include "fake_studies.h"

namespace drover::commands {
namespace {

const char kWritten[] = R"(
  name: "s" codes { role: CODE_ROLE_FINE code: "c" }
  variables { name: "x" low: 0 high: 1 }
  conditions { name: "q" values: 1 values: 2 }
  objectives { name: "y" sense: SENSE_MINIMISE }
  constraints { name: "p" at_most: 3 }
  budget { runs: 400 })";

// The same as the coordinator keeps it.
const char kStored[] = R"(
  name: "s" codes { role: CODE_ROLE_FINE code: "c" digest: "abc" cost: 1 }
  variables { name: "x" kind: VARIABLE_KIND_REAL low: 0 high: 1 scale: SCALE_LINEAR }
  conditions { name: "q" values: 1 values: 2 weights: 1 weights: 1 }
  objectives { name: "y" sense: SENSE_MINIMISE across: ACROSS_MEAN }
  constraints { name: "p" at_most: 3 scale: 3 across: ACROSS_WORST }
  search { method: "leapfrogging" seed: 7 order: ORDER_COMPLETION parallel: 4 look_ahead: 16 }
  budget { runs: 400 } replicates: 1 late: LATE_REPORTS_ACCEPT)";

std::string changes(const v1::StudySpec& written) {
  std::string text;
  for (const ChangedField& change : changed_fields(written, parsed<v1::StudySpec>(kStored))) {
    text += change.field + ": " + change.then + " -> " + change.now + "\n";
  }
  return text;
}

TEST(ChangedSpec, FindsNothingInWhatTheCoordinatorFilled) {
  EXPECT_EQ(changes(parsed<v1::StudySpec>(kWritten)), "");
  EXPECT_EQ(changes(parsed<v1::StudySpec>(kStored)), "");
}

TEST(ChangedSpec, FindsEveryFieldThatTheAuthorChanged) {
  auto written = parsed<v1::StudySpec>(kWritten);
  written.mutable_codes(0)->set_code("d");
  written.mutable_variables(0)->set_low(0.5);
  written.mutable_conditions(0)->set_values(1, 3);
  written.mutable_objectives(0)->set_sense(v1::SENSE_MAXIMISE);
  written.mutable_constraints(0)->set_allowance(0.1);
  written.mutable_search()->set_seed(8);
  written.mutable_budget()->mutable_deadline()->set_seconds(5);
  EXPECT_EQ(changes(written),
            "study.code: \"c\" -> \"d\"\n"
            "variable[0].low:  -> 0.5\n"
            "condition[0].values: 1, 2 -> 1, 3\n"
            "objective[0].maximise: minimise -> maximise\n"
            "constraint[0].allowance:  -> 0.1\n"
            "search.seed: 7 -> 8\n"
            "budget.deadline:  -> 1970-01-01T00:00:05Z\n");
}

TEST(ChangedSpec, FindsWhatTheAuthorTookAway) {
  auto written = parsed<v1::StudySpec>(kWritten);
  written.mutable_budget()->clear_runs();
  written.mutable_constraints(0)->clear_at_most();
  EXPECT_EQ(changes(written), "constraint[0].at_most: 3 -> \nbudget.runs: 400 -> \n");
  written = parsed<v1::StudySpec>(kWritten);
  written.clear_constraints();
  EXPECT_EQ(changes(written), "constraint: 1 of them -> 0 of them\n");
}

}  // namespace
}  // namespace drover::commands
