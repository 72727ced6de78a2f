// How rows of the store are shown: in the user's units, senses and words.
#pragma once

#include <map>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "drover/v1/studies.pb.h"
#include "ledger/ledger.h"
#include "store/reader.h"
#include "store/rows.h"
#include "study/plan.h"

namespace drover::service {

// All but the best design; `with_spec` false: as lists show it.
absl::StatusOr<v1::Study> study_view(const store::StudyRow& row, const study::StudyPlan* plan,
                                     const std::map<std::string, std::int64_t>& open_counts,
                                     const ledger::Ledger::StudyFigures& figures);

// Without cells.
absl::StatusOr<v1::Candidate> candidate_view(const store::CandidateRow& row, const study::StudyPlan& plan);
// Its cells, from its runs.
absl::Status add_cells(v1::Candidate& candidate, const store::CandidateRow& row, std::span<const store::RunRow> runs,
                       const study::StudyPlan& plan);

// `silent` by worker: since when nobody heard of it.
v1::Run run_view(const store::RunRow& row, std::int64_t attempts, const study::StudyPlan& plan,
                 const std::map<std::string, absl::Duration>& silent);

}  // namespace drover::service
