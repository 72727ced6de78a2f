// Owns the processes of one attempt from the first to the last.
#pragma once

#include "order.h"

namespace drover::runner {

// Starts the program, waits for it and for all that it leaves behind, keeps its limits, and writes `begun` and `ended`.
// 0: both are written; else nothing was started, and the reason is on stderr.
int supervise(const Order& order);

}  // namespace drover::runner
