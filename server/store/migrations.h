// The schema, as numbered steps under PRAGMA user_version. A step that was released is never edited.
#pragma once

#include "absl/status/status.h"
#include "store/connection.h"

namespace drover::store {

inline constexpr int kApplicationId = 0x44525652;  // "DRVR"

// Brings the schema up to date, each step in one transaction with its version. FAILED_PRECONDITION: the file is not
// ours, or a newer program made it.
absl::Status migrate(Connection& connection);

// The newest version that this program knows.
int newest_schema();

}  // namespace drover::store
