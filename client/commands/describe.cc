#include "commands/describe.h"

#include <algorithm>
#include <utility>
#include <vector>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "commands/words.h"
#include "link/duration.h"
#include "link/text.h"
#include "screen/numbers.h"
#include "screen/progress.h"
#include "screen/table.h"

namespace drover::commands {
namespace {

using screen::Align;
using screen::Table;

std::string runs_by_state(const v1::RunCounts& runs) {
  const std::pair<std::int64_t, const char*> counts[] = {
      {runs.evaluated(), "evaluated"}, {runs.failed(), "failed"},       {runs.begun(), "running"},
      {runs.granted(), "granted"},     {runs.waiting(), "waiting"},     {runs.parked(), "parked"},
      {runs.stopping(), "stopping"},   {runs.set_aside(), "set aside"}, {runs.withdrawn(), "withdrawn"}};
  std::vector<std::string> parts;
  for (const auto& [count, name] : counts) {
    if (count > 0) parts.push_back(absl::StrCat(screen::whole(count), " ", name));
  }
  return parts.empty() ? "none yet" : absl::StrJoin(parts, ", ");
}

std::string budget_text(const v1::Study& study) {
  const v1::Budget& budget = study.spec().budget();
  std::string text = budget.runs() > 0 ? absl::StrCat(screen::whole(screen::settled(study.runs())), " of ",
                                                      screen::counted(budget.runs(), "run", "runs"), " used")
                                       : "no limit of runs";
  if (budget.has_deadline()) {
    absl::StrAppend(&text, ", until ",
                    absl::FormatTime("%Y-%m-%d %H:%M UTC", absl::FromUnixSeconds(budget.deadline().seconds()),
                                     absl::UTCTimeZone()));
  }
  return text;
}

std::string state_text(const v1::Study& study, const screen::Screen& screen) {
  std::string text = word(study.state());
  const std::string reason = word(study.reason());
  if (!reason.empty()) absl::StrAppend(&text, " (", reason, ")");
  if (study.state() == v1::STUDY_STATE_FAILED) return screen.bad(text);
  return study.state() == v1::STUDY_STATE_FINISHED ? screen.good(text) : screen.strong(text);
}

// The value of the same name; null when there is none.
const v1::NamedValue* same_name(const google::protobuf::RepeatedPtrField<v1::NamedValue>& values,
                                const std::string& name) {
  const auto found =
      std::find_if(values.begin(), values.end(), [&](const auto& value) { return value.name() == name; });
  return found == values.end() ? nullptr : &*found;
}

std::string gain(const v1::Objective& objective, const v1::NamedValue& best, const v1::NamedValue& baseline) {
  const double difference = best.number() - baseline.number();
  std::string text = absl::StrCat(difference >= 0 ? "+" : "", screen::number(difference, 4));
  if (!best.unit().empty()) absl::StrAppend(&text, " ", link::printable(best.unit()));
  if (baseline.number() != 0) {
    absl::StrAppend(&text, " (", difference >= 0 ? "+" : "",
                    screen::number(100 * difference / std::abs(baseline.number()), 3), " %)");
  }
  const bool better = objective.sense() == v1::SENSE_MAXIMISE ? difference > 0 : difference < 0;
  return absl::StrCat(text, difference == 0 ? "" : better ? ", better" : ", worse");
}

class Design {
 public:
  Design(const v1::Candidate& candidate, const v1::StudySpec& spec, const v1::Candidate* baseline)
      : candidate_(candidate), spec_(spec), baseline_(baseline), table_(columns(baseline != nullptr)) {}

  std::string text() {
    for (const v1::NamedValue& value : candidate_.values()) add(value, values(), "");
    for (int i = 0; i < candidate_.objectives_size(); ++i) add_objective(i);
    for (int i = 0; i < candidate_.constraints_size(); ++i) add_constraint(i);
    return table_.text(2);
  }

 private:
  using Values = google::protobuf::RepeatedPtrField<v1::NamedValue>;

  static std::vector<Table::Column> columns(bool with_baseline) {
    if (with_baseline) return {{"name"}, {"best", Align::kRight}, {"today", Align::kRight}, {"unit"}, {""}};
    return {{"name"}, {"value", Align::kRight}, {"unit"}, {""}};
  }

  const Values* values() const { return baseline_ == nullptr ? nullptr : &baseline_->values(); }

  void add(const v1::NamedValue& value, const Values* others, const std::string& remark) {
    std::vector<std::string> cells = {value.name(), screen::bare(value)};
    if (baseline_ != nullptr) {
      const v1::NamedValue* const other = others == nullptr ? nullptr : same_name(*others, value.name());
      cells.push_back(other == nullptr ? "-" : screen::bare(*other));
    }
    cells.push_back(value.unit());
    cells.push_back(remark);
    table_.add(std::move(cells));
  }

  void add_objective(int i) {
    const v1::NamedValue& value = candidate_.objectives(i);
    std::string remark;
    if (i < spec_.objectives_size()) {
      const v1::Objective& objective = spec_.objectives(i);
      remark = objective.sense() == v1::SENSE_MAXIMISE ? "maximised" : "minimised";
      const bool judged = baseline_ != nullptr && i < baseline_->objectives_size();
      if (judged) absl::StrAppend(&remark, ": ", gain(objective, value, baseline_->objectives(i)));
    }
    add(value, baseline_ == nullptr ? nullptr : &baseline_->objectives(), remark);
  }

  void add_constraint(int i) {
    const std::string remark = i < spec_.constraints_size() ? limits_of(spec_.constraints(i)) : "";
    add(candidate_.constraints(i), baseline_ == nullptr ? nullptr : &baseline_->constraints(), remark);
  }

  const v1::Candidate& candidate_;
  const v1::StudySpec& spec_;
  const v1::Candidate* baseline_;
  Table table_;
};

// What each condition gave: a line a condition.
std::string cells_text(const v1::Candidate& candidate) {
  if (candidate.cells_size() < 2) return "";
  std::vector<Table::Column> columns;
  const v1::CellResult& first = candidate.cells(0);
  for (const v1::NamedValue& value : first.condition_values()) columns.push_back({value.name(), Align::kRight});
  columns.push_back({"weight", Align::kRight});
  for (const v1::NamedValue& value : first.outputs()) columns.push_back({value.name(), Align::kRight});
  Table table(columns);
  for (const v1::CellResult& cell : candidate.cells()) {
    std::vector<std::string> row;
    for (const v1::NamedValue& value : cell.condition_values()) row.push_back(screen::value(value));
    row.push_back(screen::number(cell.weight()));
    for (const v1::NamedValue& value : cell.outputs()) row.push_back(screen::bare(value));
    table.add(std::move(row));
  }
  return absl::StrCat("\nunder each condition\n", table.text(2));
}

}  // namespace

std::string limits_of(const v1::Constraint& constraint) {
  std::vector<std::string> parts;
  if (constraint.has_at_least()) parts.push_back("at least " + screen::number(constraint.at_least()));
  if (constraint.has_at_most()) parts.push_back("at most " + screen::number(constraint.at_most()));
  std::string text = absl::StrJoin(parts, ", ");
  if (!constraint.unit().empty()) absl::StrAppend(&text, " ", constraint.unit());
  if (constraint.allowance() > 0) {
    absl::StrAppend(&text, ", ", screen::number(100 * constraint.allowance()), " % kept back");
  }
  return text;
}

std::string describe(const v1::Candidate& candidate, const v1::StudySpec& spec,
                     const std::optional<v1::Candidate>& baseline) {
  std::string text = absl::StrCat("candidate ", candidate.number(), " (", word(candidate.verdict()), ")\n");
  if (!candidate.reason().empty()) absl::StrAppend(&text, "  ", link::printable(candidate.reason()), "\n");
  absl::StrAppend(&text, Design(candidate, spec, baseline.has_value() ? &*baseline : nullptr).text());
  if (baseline.has_value() && baseline->verdict() != v1::CANDIDATE_VERDICT_FEASIBLE) {
    absl::StrAppend(&text, "  today's design is ", word(baseline->verdict()), baseline->reason().empty() ? "" : ": ",
                    link::printable(baseline->reason()), "\n");
  }
  if (candidate.number() == 1 && has_baseline(spec)) absl::StrAppend(&text, "  this is today's design\n");
  return absl::StrCat(text, cells_text(candidate));
}

std::string describe(const v1::Study& study, absl::Time now, const screen::Screen& screen) {
  Table table({{""}, {""}});
  table.add({"runs", runs_by_state(study.runs())});
  table.add({"budget", budget_text(study)});
  table.add({"candidates", absl::StrCat(screen::whole(study.candidates()), " issued, ", screen::whole(study.learned()),
                                        " learned by the search")});
  if (study.has_mean_run_time()) {
    table.add({"a run takes", link::human(link::from_proto(study.mean_run_time())) + " on average"});
  }
  if (!is_over(study.state())) {
    const std::string slots = screen::counted(study.slots(), "slot", "slots");
    table.add({"workers", study.slots() == 0
                              ? "none that could run it"
                              : absl::StrCat(study.workers_busy(), " busy with it, ", slots, " in all")});
  }
  if (study.attempts_lost() > 0) {
    table.add({"attempts lost", absl::StrCat(screen::whole(study.attempts_lost()), " (their runs wait again)")});
  }
  if (const auto left = screen::time_left(study, now)) table.add({"time left", screen::about(*left)});

  std::string text = absl::StrCat(screen.strong(link::printable(study.name())), ": ", state_text(study, screen), "\n");
  if (!study.sentence().empty()) absl::StrAppend(&text, link::printable(study.sentence()), "\n");
  absl::StrAppend(&text, "\n", table.text(2), "\n");
  if (!study.has_best()) return absl::StrCat(text, "no feasible design yet\n");
  return absl::StrCat(text, "best so far: ", describe(study.best(), study.spec()));
}

bool has_baseline(const v1::StudySpec& spec) {
  return spec.variables_size() > 0 &&
         std::all_of(spec.variables().begin(), spec.variables().end(), [](const v1::Variable& variable) {
           return variable.has_baseline() || variable.has_baseline_choice();
         });
}

bool is_over(v1::StudyState state) {
  return state == v1::STUDY_STATE_FINISHED || state == v1::STUDY_STATE_STOPPED || state == v1::STUDY_STATE_FAILED;
}

}  // namespace drover::commands
