// What a solo run leaves behind when its study is over.
#pragma once

#include "absl/status/statusor.h"
#include "commands/coordinator.h"
#include "commands/data_folder.h"
#include "commands/output.h"

namespace drover::commands {

// Prints the best design with its constraints and the gain against today's, writes table.csv and best.json into the
// folder, and says where. kNo when the study failed or has no feasible design.
absl::StatusOr<Exit> summarise(Coordinator& coordinator, const v1::Study& study, const DataFolder& folder,
                               Output& output);

}  // namespace drover::commands
