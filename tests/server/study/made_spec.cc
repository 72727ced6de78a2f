#include "server/study/made_spec.h"

#include <cstdlib>

namespace drover::study {

v1::CodeDefinition beam_code() {
  v1::CodeDefinition code;
  code.set_name("beam");
  code.set_version("1");
  code.set_digest("c0de");
  v1::Accepted& height = *code.add_accepts();
  height.set_name("height");
  height.set_unit("mm");
  v1::Accepted& material = *code.add_accepts();
  material.set_name("material");
  material.add_choices("wood");
  material.add_choices("steel");
  v1::Accepted& load = *code.add_accepts();
  load.set_name("load");
  load.set_unit("kN");
  code.add_outputs()->set_name("deflection");
  code.mutable_outputs(0)->set_unit("mm");
  code.add_outputs()->set_name("mass");
  code.mutable_outputs(1)->set_unit("kg");
  code.set_cores(1);
  code.mutable_time_limit()->set_seconds(60);
  return code;
}

v1::StudySpec beam_study() {
  v1::StudySpec spec;
  spec.set_name("beam");
  spec.add_codes()->set_code("beam");
  v1::Variable& height = *spec.add_variables();
  height.set_name("height");
  height.set_kind(v1::VARIABLE_KIND_STEPPED);
  height.set_unit("cm");
  height.set_low(2);
  height.set_high(8);
  height.set_step(0.5);
  v1::Variable& material = *spec.add_variables();
  material.set_name("material");
  material.set_kind(v1::VARIABLE_KIND_CHOICE);
  material.add_choices("wood");
  material.add_choices("steel");
  v1::Condition& load = *spec.add_conditions();
  load.set_name("load");
  load.set_unit("kN");
  load.add_values(2);
  load.add_values(4);
  load.add_weights(3);
  load.add_weights(1);
  v1::Derived& cost = *spec.add_derived();
  cost.set_name("cost");
  cost.set_formula("2 * mass + load");
  spec.add_objectives()->set_name("cost");
  v1::Constraint& deflection = *spec.add_constraints();
  deflection.set_name("deflection");
  deflection.set_unit("cm");
  deflection.set_at_most(1.0);
  deflection.set_allowance(0.1);
  spec.mutable_budget()->set_runs(100);
  return spec;
}

CheckResult check_beam(const v1::StudySpec& spec) {
  static const std::vector<v1::CodeDefinition> codes = {beam_code()};
  return check_spec(spec, {.codes = codes, .slots = 3, .fresh_seed = 42, .now = absl::FromUnixSeconds(1'800'000'000)});
}

std::unique_ptr<StudyPlan> plan_of(const v1::StudySpec& spec) {
  const CheckResult checked = check_beam(spec);
  if (!checked.problems.empty()) std::abort();
  const std::vector<v1::CodeDefinition> codes = {beam_code()};
  auto plan = StudyPlan::make(checked.effective, codes, checked.cells);
  if (!plan.ok()) std::abort();
  return *std::move(plan);
}

RunResult ran(int condition, int replicate, double deflection, double mass) {
  RunResult run{.condition = condition, .replicate = replicate, .report = {}};
  run.report.set_ending(v1::ENDING_EVALUATED);
  run.report.add_outputs()->set_name("deflection");
  run.report.mutable_outputs(0)->set_value(deflection);
  run.report.add_outputs()->set_name("mass");
  run.report.mutable_outputs(1)->set_value(mass);
  run.report.mutable_usage()->mutable_wall()->set_seconds(3);
  return run;
}

}  // namespace drover::study
