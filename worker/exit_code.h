// What this program ends with.
#pragma once

namespace drover {

inline constexpr int kDone = 0, kFailed = 1, kUsage = 2;

}  // namespace drover
