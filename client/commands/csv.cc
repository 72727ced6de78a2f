#include "commands/csv.h"

#include <utility>
#include <vector>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "absl/strings/str_replace.h"
#include "commands/words.h"
#include "screen/numbers.h"

namespace drover::commands {
namespace {

using Values = google::protobuf::RepeatedPtrField<v1::NamedValue>;

std::string quoted(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  return absl::StrCat("\"", absl::StrReplaceAll(text, {{"\"", "\"\""}}), "\"");
}

// `unit` as the study has it; else as the best candidate's value at this place has it.
std::string title(const std::string& name, std::string unit, const Values& best, int index) {
  if (unit.empty() && index < best.size()) unit = best.Get(index).unit();
  return quoted(unit.empty() ? name : absl::StrCat(name, " [", unit, "]"));
}

void add_values(const Values& values, int columns, std::vector<std::string>& cells) {
  for (int i = 0; i < columns; ++i) {
    std::string cell;
    if (i < values.size() && values.Get(i).value_case() == v1::NamedValue::kNumber) {
      cell = screen::exact(values.Get(i).number());
    } else if (i < values.size()) {
      cell = quoted(values.Get(i).text());
    }
    cells.push_back(std::move(cell));
  }
}

}  // namespace

std::string csv_head(const v1::Study& study) {
  const v1::StudySpec& spec = study.spec();
  const v1::Candidate& best = study.best();
  std::vector<std::string> titles = {"candidate"};
  for (int i = 0; i < spec.variables_size(); ++i) {
    titles.push_back(title(spec.variables(i).name(), spec.variables(i).unit(), best.values(), i));
  }
  titles.push_back("verdict");
  for (int i = 0; i < spec.objectives_size(); ++i) {
    titles.push_back(title(spec.objectives(i).name(), spec.objectives(i).unit(), best.objectives(), i));
  }
  for (int i = 0; i < spec.constraints_size(); ++i) {
    titles.push_back(title(spec.constraints(i).name(), spec.constraints(i).unit(), best.constraints(), i));
  }
  titles.push_back("violation");
  return absl::StrCat(absl::StrJoin(titles, ","), "\n");
}

std::string csv_line(const v1::Study& study, const v1::Candidate& candidate) {
  const v1::StudySpec& spec = study.spec();
  std::vector<std::string> cells = {absl::StrCat(candidate.number())};
  add_values(candidate.values(), spec.variables_size(), cells);
  cells.push_back(word(candidate.verdict()));
  add_values(candidate.objectives(), spec.objectives_size(), cells);
  add_values(candidate.constraints(), spec.constraints_size(), cells);
  const bool judged =
      candidate.verdict() == v1::CANDIDATE_VERDICT_FEASIBLE || candidate.verdict() == v1::CANDIDATE_VERDICT_INFEASIBLE;
  cells.push_back(judged ? screen::exact(candidate.violation()) : "");
  return absl::StrCat(absl::StrJoin(cells, ","), "\n");
}

}  // namespace drover::commands
