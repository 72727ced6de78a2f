#include "service/plans.h"

#include <algorithm>
#include <vector>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "study/cells.h"

namespace drover::service {

absl::StatusOr<std::shared_ptr<const study::StudyPlan>> Plans::of(const store::StudyRow& row, store::Reader& reader) {
  {
    const std::lock_guard lock(mutex_);
    const auto at =
        std::find_if(recent_.begin(), recent_.end(), [&](const auto& entry) { return entry.first == row.id; });
    if (at != recent_.end()) {
      recent_.splice(recent_.begin(), recent_, at);
      return at->second;
    }
  }
  DROVER_ASSIGN(const std::vector<v1::CodeDefinition> codes, reader.codes(row.id));
  DROVER_ASSIGN(const std::vector<study::Cell> stored, reader.cells(row.id));
  DROVER_ASSIGN(const std::vector<study::CellValues> cells, study::unpack_cells(stored));
  absl::StatusOr<std::unique_ptr<study::StudyPlan>> made = study::StudyPlan::make(row.spec, codes, cells);
  if (!made.ok()) {
    return absl::DataLossError(
        absl::StrCat("the stored spec of study ", row.name, " makes no plan: ", made.status().message()));
  }
  std::shared_ptr<const study::StudyPlan> plan = *std::move(made);
  const std::lock_guard lock(mutex_);
  recent_.emplace_front(row.id, plan);
  if (recent_.size() > kKept) recent_.pop_back();
  return plan;
}

}  // namespace drover::service
