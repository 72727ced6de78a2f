#include "commands/summary.h"

#include <optional>

#include "absl/strings/str_cat.h"
#include "commands/csv.h"
#include "commands/describe.h"
#include "commands/json.h"
#include "commands/new_file.h"
#include "commands/words.h"
#include "link/text.h"
#include "screen/numbers.h"
#include "screen/progress.h"
#include "status/try.h"

namespace drover::commands {
namespace {

struct Result {
  std::optional<v1::Candidate> best;
  std::optional<v1::Candidate> baseline;  // another candidate than the best
};

absl::StatusOr<Result> fetch(Coordinator& coordinator, const v1::Study& study) {
  Result result;
  if (!study.has_best()) return result;
  DROVER_ASSIGN(result.best, coordinator.candidate(study.name(), study.best().number()));
  if (has_baseline(study.spec()) && result.best->number() != 1) {
    DROVER_ASSIGN(result.baseline, coordinator.candidate(study.name(), 1));
  }
  return result;
}

absl::Status write_table(Coordinator& coordinator, const v1::Study& study, const std::string& path) {
  std::string text = csv_head(study);
  DROVER_TRY(coordinator.candidates(study.name(), [&](const v1::Candidate& candidate) {
    text += csv_line(study, candidate);
    return true;
  }));
  return write_file(path, text);
}

nlohmann::json document_of(const v1::Study& study, const Result& result) {
  nlohmann::json document = {{"study", to_json(study)}, {"best", nullptr}};
  document["study"].erase("best");
  if (result.best.has_value()) document["best"] = to_json(*result.best);
  if (result.baseline.has_value()) document["baseline"] = to_json(*result.baseline);
  return document;
}

std::string text_of(const v1::Study& study, const Result& result) {
  std::string text = absl::StrCat("study ", link::printable(study.name()), " is ", word(study.state()));
  if (!study.sentence().empty()) absl::StrAppend(&text, ": ", link::printable(study.sentence()));
  absl::StrAppend(&text, "\n", screen::counted(screen::settled(study.runs()), "run", "runs"), " settled, ",
                  screen::whole(study.runs().failed()), " of them failed; ",
                  screen::counted(study.attempts_lost(), "attempt", "attempts"), " lost\n\n");
  if (!result.best.has_value()) {
    return absl::StrCat(text, "no feasible design was found; table.csv shows what each candidate violates\n");
  }
  return absl::StrCat(text, "best design: ", describe(*result.best, study.spec(), result.baseline));
}

}  // namespace

absl::StatusOr<Exit> summarise(Coordinator& coordinator, const v1::Study& study, const DataFolder& folder,
                               Output& output) {
  const std::string table = folder.file("table.csv"), best = folder.file("best.json");
  DROVER_ASSIGN(const Result result, fetch(coordinator, study));
  nlohmann::json document = document_of(study, result);
  DROVER_TRY(write_table(coordinator, study, table));
  DROVER_TRY(write_file(best, text_of(document, 2) + "\n"));
  document["table"] = table;
  document["data"] = folder.path();
  output.json() ? output.document(document) : output.data(text_of(study, result));
  output.say(absl::StrCat("every candidate: ", table, "\nthe best design:  ", best));
  return study.state() == v1::STUDY_STATE_FAILED || !result.best.has_value() ? Exit::kNo : Exit::kDone;
}

}  // namespace drover::commands
