#include "study/cells.h"

#include <cstdint>
#include <utility>

#include "status/try.h"
#include "study/bytes.h"

namespace drover::study {

absl::StatusOr<std::vector<CellValues>> unpack_cells(const std::vector<Cell>& cells) {
  std::vector<CellValues> unpacked;
  for (const Cell& cell : cells) {
    CellValues& values = unpacked.emplace_back();
    DROVER_ASSIGN(values.values, unpack_doubles(cell.values()));
    DROVER_ASSIGN(values.weight, unpack_double(cell.weight()));
  }
  return unpacked;
}

std::vector<Cell> pack_cells(const std::vector<CellValues>& cells) {
  std::vector<Cell> packed;
  for (std::size_t i = 0; i < cells.size(); ++i) {
    Cell& cell = packed.emplace_back();
    cell.set_condition(static_cast<std::int32_t>(i));
    cell.set_values(pack_doubles(cells[i].values));
    cell.set_weight(pack_double(cells[i].weight));
  }
  return packed;
}

}  // namespace drover::study
