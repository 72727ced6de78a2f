// What a StudyPlan is made of. Internal to this folder.
#pragma once

#include <optional>
#include <vector>

#include "search/method.h"
#include "search/space.h"
#include "study/measuring.h"
#include "study/plan.h"
#include "study/scoring.h"
#include "study/units.h"

namespace drover::study {

// Where an input of the code comes from.
struct InputSource {
  std::string name, unit;  // the code's
  int variable = -1;       // index, or -1
  int condition = -1;      // index, or -1
  Conversion conversion;   // from the study's unit to the code's
};

struct StudyPlan::Parts {
  v1::StudySpec spec;
  v1::CodeDefinition code;
  search::Space space;
  search::Settings settings;
  std::vector<CellValues> cells;
  std::vector<InputSource> inputs;  // sorted by name
  Measuring measuring;
  std::vector<Limits> limits;       // one a constraint, tightened
  std::vector<double> weights;      // one a cell
};

}  // namespace drover::study
