// Reports of attempts that brought no result, and what fits into a report.
#pragma once

#include <string>

#include "code/verdict.h"
#include "drover/v1/attempt.pb.h"
#include "process/survey.h"

namespace drover::session {

v1::AttemptReport lost(v1::LossReason why, const std::string& reason);
v1::AttemptReport not_begun(const std::string& reason);
v1::AttemptReport stopped(const std::string& reason);

// Of an attempt whose end its runner saw and recorded. `found.ended` must be there.
code::HowItEnded how_it_ended(const process::Survey& found);

// Cuts texts to what a report may hold and cleans what must be UTF-8.
void fit(v1::AttemptReport& report);

}  // namespace drover::session
