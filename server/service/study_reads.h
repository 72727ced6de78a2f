// What people ask of studies, answered from the store.
#pragma once

#include <string>

#include "absl/status/statusor.h"
#include "drover/v1/studies.pb.h"
#include "ledger/ledger.h"
#include "service/plans.h"
#include "store/reader.h"

namespace drover::service {

// Each function reads through the reader it is given and so may run on any reading thread. NOT_FOUND with the nearest
// name where there is no such study.
class StudyReads {
 public:
  StudyReads(const ledger::Ledger& ledger, Plans& plans) : ledger_(ledger), plans_(plans) {}

  absl::StatusOr<store::StudyRow> row(store::Reader& reader, const std::string& name) const;
  absl::StatusOr<v1::Study> study(store::Reader& reader, const std::string& name) const;
  absl::StatusOr<v1::ListStudiesResponse> studies(store::Reader& reader, const v1::ListStudiesRequest& request) const;
  absl::StatusOr<v1::Candidate> candidate(store::Reader& reader, const v1::GetCandidateRequest& request) const;
  absl::StatusOr<v1::ListCandidatesResponse> candidates(store::Reader& reader,
                                                        const v1::ListCandidatesRequest& request) const;
  absl::StatusOr<v1::ListRunsResponse> runs(store::Reader& reader, const v1::ListRunsRequest& request) const;

 private:
  absl::StatusOr<v1::Study> view(store::Reader& reader, const store::StudyRow& row, bool whole) const;

  const ledger::Ledger& ledger_;
  Plans& plans_;
};

}  // namespace drover::service
