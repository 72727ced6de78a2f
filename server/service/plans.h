// Plans of studies, to show values in the user's units.
#pragma once

#include <cstdint>
#include <list>
#include <memory>
#include <mutex>
#include <utility>

#include "absl/status/statusor.h"
#include "store/reader.h"
#include "study/plan.h"

namespace drover::service {

// Keeps the plans that were used last; a plan never changes. Thread-safe.
class Plans {
 public:
  // Made from the store where it is not at hand. DATA_LOSS: the stored spec makes no plan.
  absl::StatusOr<std::shared_ptr<const study::StudyPlan>> of(const store::StudyRow& row, store::Reader& reader);

 private:
  static constexpr std::size_t kKept = 64;
  std::mutex mutex_;
  std::list<std::pair<std::int64_t, std::shared_ptr<const study::StudyPlan>>> recent_;  // the newest first
};

}  // namespace drover::service
