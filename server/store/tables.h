// How an event changes the tables: values are copied out of it, none is computed.
#pragma once

#include <cstdint>

#include "absl/status/status.h"
#include "store/store.h"
#include "study/events.pb.h"

namespace drover::store {

// INTERNAL or ABORTED when the event does not fit what the tables hold: a bug, never a user's mistake.
absl::Status apply_to_tables(Prepared& sql, const study::Event& event, std::int64_t number);

// Parts of it, by what an event is about.
absl::Status apply_to_studies(Prepared& sql, const study::Event& event, std::int64_t number);
absl::Status apply_to_attempts(Prepared& sql, const study::Event& event, std::int64_t number);

}  // namespace drover::store
