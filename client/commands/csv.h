// Candidates as comma-separated values (RFC 4180, lines end with '\n').
#pragma once

#include <string>

#include "drover/v1/study.pb.h"

namespace drover::commands {

// Columns: candidate, the variables, verdict, objectives, constraints, violation. A unit stands behind the name:
// "diameter [m]". Numbers read back as the same numbers; what a candidate does not have is empty.
std::string csv_head(const v1::Study& study);
std::string csv_line(const v1::Study& study, const v1::Candidate& candidate);

}  // namespace drover::commands
