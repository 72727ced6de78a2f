// Numbers as people read them.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>

#include "absl/time/time.h"
#include "drover/v1/study.pb.h"

namespace drover::screen {

std::string number(double value, int digits = 6);  // significant digits at most, without trailing zeros
std::string exact(double value);                   // the shortest text that reads back as the same number
std::string whole(std::int64_t value);             // 12,345
std::string counted(std::int64_t count, const std::string& one, const std::string& many);  // "1 run", "12,345 runs"

// "45.67 kEUR/a", "S355"; a text is made fit for a terminal.
std::string value(const v1::NamedValue& named, int digits = 6);
// Without the unit.
std::string bare(const v1::NamedValue& named, int digits = 6);

// "about 2 min", "about 3 h 20 min": rounded to what an estimate is worth.
std::string about(absl::Duration span);

}  // namespace drover::screen
