// A spec and its code for tests: a beam of height and material under two loads.
#pragma once

#include <memory>
#include <vector>

#include "drover/v1/code.pb.h"
#include "drover/v1/study.pb.h"
#include "study/plan.h"
#include "study/spec_check.h"

namespace drover::study {

v1::CodeDefinition
beam_code();                 // accepts height (mm), material (wood, steel), load (kN); gives deflection (mm), mass (kg)
v1::StudySpec beam_study();  // height in cm, material; condition load 2 and 4 kN weighing 3 to 1; minimises cost
CheckResult check_beam(const v1::StudySpec& spec);
std::unique_ptr<StudyPlan> plan_of(const v1::StudySpec& spec);
RunResult ran(int condition, int replicate, double deflection, double mass);

}  // namespace drover::study
