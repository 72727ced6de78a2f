// Cells as events and tables keep them, and as a plan takes them.
#pragma once

#include <vector>

#include "absl/status/statusor.h"
#include "study/events.pb.h"
#include "study/spec_check.h"

namespace drover::study {

// INVALID_ARGUMENT when a cell's bytes are no doubles.
absl::StatusOr<std::vector<CellValues>> unpack_cells(const std::vector<Cell>& cells);

std::vector<Cell> pack_cells(const std::vector<CellValues>& cells);

}  // namespace drover::study
