#include "service/study_reads.h"

#include <map>
#include <optional>
#include <utility>
#include <vector>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "ledger/durations.h"
#include "ledger/handlers.h"
#include "service/views.h"
#include "status/try.h"
#include "study/names.h"

namespace drover::service {
namespace {

constexpr int kLargestPage = 1000;
constexpr int kUsualStudies = 100;
constexpr int kUsualRows = 1000;
constexpr std::size_t kPageBytes = 512 << 10;  // a page ends early rather than outgrow a message

absl::StatusOr<int> page_size(std::int32_t asked, int usual) {
  if (asked >= 0 && asked <= kLargestPage) return asked == 0 ? usual : asked;
  return absl::InvalidArgumentError(absl::StrCat("page_size: ", asked, " is not between 0 and ", kLargestPage));
}

absl::StatusOr<std::int64_t> number_of(const std::string& token) {
  std::int64_t number = 0;
  if (token.empty() || absl::SimpleAtoi(token, &number)) return number;
  return absl::InvalidArgumentError("page_token: it is none that an earlier answer gave");
}

absl::Status no_such_study(store::Reader& reader, const std::string& name) {
  DROVER_ASSIGN(const std::vector<std::string> names, reader.study_names());
  const std::string near = study::nearest(name, names);
  return ledger::refusal(absl::StatusCode::kNotFound, "NO_SUCH_STUDY",
                         near.empty() ? absl::StrCat("no study named ", name)
                                      : absl::StrCat("no study named ", name, "; the nearest is ", near));
}

}  // namespace

absl::StatusOr<store::StudyRow> StudyReads::row(store::Reader& reader, const std::string& name) const {
  DROVER_ASSIGN(std::optional<store::StudyRow> row, reader.study(name));
  if (!row) return no_such_study(reader, name);
  return *std::move(row);
}

absl::StatusOr<v1::Study> StudyReads::view(store::Reader& reader, const store::StudyRow& row, bool whole) const {
  DROVER_ASSIGN(const auto counts, reader.open_counts(row.id));
  if (!whole) return study_view(row, nullptr, counts, ledger_.figures(row.id));
  DROVER_ASSIGN(const auto plan, plans_.of(row, reader));
  DROVER_ASSIGN(v1::Study study, study_view(row, plan.get(), counts, ledger_.figures(row.id)));
  if (row.best == 0) return study;
  DROVER_ASSIGN(const std::optional<store::CandidateRow> best, reader.candidate(row.id, row.best));
  if (!best) return absl::DataLossError(absl::StrCat("study ", row.name, " has lost its best candidate"));
  DROVER_ASSIGN(*study.mutable_best(), candidate_view(*best, *plan));
  return study;
}

absl::StatusOr<v1::Study> StudyReads::study(store::Reader& reader, const std::string& name) const {
  DROVER_ASSIGN(const store::StudyRow found, row(reader, name));
  return view(reader, found, true);
}

absl::StatusOr<v1::ListStudiesResponse> StudyReads::studies(store::Reader& reader,
                                                            const v1::ListStudiesRequest& request) const {
  DROVER_ASSIGN(const int size, page_size(request.page_size(), kUsualStudies));
  DROVER_ASSIGN(const std::vector<store::StudyRow> rows, reader.studies(request.page_token(), size + 1));
  v1::ListStudiesResponse response;
  for (const store::StudyRow& one : rows) {
    if (response.studies_size() == size) {
      response.set_next_page_token(response.studies(size - 1).name());
      break;
    }
    DROVER_ASSIGN(*response.add_studies(), view(reader, one, false));
  }
  return response;
}

absl::StatusOr<v1::Candidate> StudyReads::candidate(store::Reader& reader,
                                                    const v1::GetCandidateRequest& request) const {
  DROVER_ASSIGN(const store::StudyRow study, row(reader, request.study()));
  const std::int64_t number = request.number() == 0 ? study.best : request.number();
  if (number == 0) {
    return ledger::refusal(absl::StatusCode::kNotFound, "NO_FEASIBLE_DESIGN",
                           absl::StrCat("study ", study.name, " has found no feasible design yet"));
  }
  DROVER_ASSIGN(const std::optional<store::CandidateRow> found, reader.candidate(study.id, number));
  if (!found) {
    return ledger::refusal(
        absl::StatusCode::kNotFound, "NO_SUCH_CANDIDATE",
        absl::StrCat("study ", study.name, " has no candidate ", number, "; there are ", study.candidates));
  }
  DROVER_ASSIGN(const auto plan, plans_.of(study, reader));
  DROVER_ASSIGN(v1::Candidate shown, candidate_view(*found, *plan));
  DROVER_ASSIGN(const std::vector<store::RunRow> runs, reader.runs_of(study.id, number));
  DROVER_TRY(add_cells(shown, *found, runs, *plan));
  return shown;
}

absl::StatusOr<v1::ListCandidatesResponse> StudyReads::candidates(store::Reader& reader,
                                                                  const v1::ListCandidatesRequest& request) const {
  DROVER_ASSIGN(const int size, page_size(request.page_size(), kUsualRows));
  DROVER_ASSIGN(const std::int64_t after, number_of(request.page_token()));
  DROVER_ASSIGN(const store::StudyRow study, row(reader, request.study()));
  DROVER_ASSIGN(const auto plan, plans_.of(study, reader));
  DROVER_ASSIGN(const std::vector<store::CandidateRow> rows, reader.candidates(study.id, after, size + 1));
  v1::ListCandidatesResponse response;
  std::size_t bytes = 0;
  for (const store::CandidateRow& one : rows) {
    if (response.candidates_size() == size || bytes > kPageBytes) {
      response.set_next_page_token(absl::StrCat(response.candidates().rbegin()->number()));
      break;
    }
    DROVER_ASSIGN(*response.add_candidates(), candidate_view(one, *plan));
    bytes += response.candidates().rbegin()->ByteSizeLong();
  }
  return response;
}

absl::StatusOr<v1::ListRunsResponse> StudyReads::runs(store::Reader& reader, const v1::ListRunsRequest& request) const {
  DROVER_ASSIGN(const int size, page_size(request.page_size(), kUsualRows));
  DROVER_ASSIGN(const std::int64_t after, number_of(request.page_token()));
  DROVER_ASSIGN(const store::StudyRow study, row(reader, request.study()));
  DROVER_ASSIGN(const auto plan, plans_.of(study, reader));
  std::map<std::string, absl::Duration> silent;
  for (const v1::Worker& worker : ledger_.workers()) silent[worker.name()] = ledger::to_duration(worker.heard());
  DROVER_ASSIGN(const std::vector<store::RunRow> rows, request.open_only() ? reader.open_runs(study.id, after, size + 1)
                                                                           : reader.runs(study.id, after, size + 1));
  v1::ListRunsResponse response;
  std::size_t bytes = 0;
  for (const store::RunRow& one : rows) {
    if (response.runs_size() == size || bytes > kPageBytes) {
      response.set_next_page_token(absl::StrCat(response.runs().rbegin()->number()));
      break;
    }
    DROVER_ASSIGN(const std::int64_t attempts, reader.attempts(one.id));
    *response.add_runs() = run_view(one, attempts, *plan, silent);
    bytes += response.runs().rbegin()->ByteSizeLong();
  }
  return response;
}

}  // namespace drover::service
