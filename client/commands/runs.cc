// `drover runs`
#include <CLI/CLI.hpp>
#include <memory>

#include "commands/command.h"
#include "commands/json.h"
#include "commands/words.h"
#include "link/duration.h"
#include "screen/numbers.h"
#include "screen/table.h"

namespace drover::commands {
namespace {

struct Wanted {
  std::string study;
  bool open_only = false;
};

std::string state_text(const v1::Run& run) { return spaced(word(run.state())); }

std::string result_text(const v1::Run& run) {
  std::string text = word(run.ending());
  if (run.failure() != v1::FAILURE_KIND_UNSPECIFIED) text += " (" + word(run.failure()) + ")";
  return run.reason().empty() ? text : text + ": " + run.reason();
}

void add(screen::Table& table, const v1::Run& run) {
  table.add({std::to_string(run.number()), std::to_string(run.candidate()), std::to_string(run.condition()),
             std::to_string(run.replicate()), state_text(run), std::to_string(run.attempts()), run.worker(),
             run.has_wall() ? link::human(link::from_proto(run.wall())) : "", result_text(run)});
}

Exit runs(Context& context, const Wanted& wanted) {
  Output& output = context.output;
  const auto coordinator = context.connect();
  if (!coordinator.ok()) return output.fail(coordinator.status());
  using screen::Align;
  screen::Table table({{"run", Align::kRight},
                       {"candidate", Align::kRight},
                       {"condition", Align::kRight},
                       {"replicate", Align::kRight},
                       {"state"},
                       {"attempts", Align::kRight},
                       {"worker"},
                       {"time", Align::kRight},
                       {"result"}});
  const absl::Status status = (*coordinator)->runs(wanted.study, wanted.open_only, [&](const v1::Run& run) {
    output.json() ? output.document(to_json(run)) : add(table, run);
    return !output.closed();
  });
  if (!status.ok()) return output.fail(status);
  if (!output.json()) output.data(table.text());
  return Exit::kDone;
}

}  // namespace

Command runs_command() {
  const auto wanted = std::make_shared<Wanted>();
  return {.name = "runs",
          .summary = "Every run of a study: its state, its worker, how it ended",
          .details = "With --json one run a line, with its outputs.",
          .examples = {"drover runs penstock", "drover runs penstock --open", "drover runs penstock --json"},
          .options =
              [wanted](CLI::App& app) {
                app.add_option("STUDY", wanted->study, "name of the study")->required();
                app.add_flag("--open", wanted->open_only, "only runs that are neither settled nor withdrawn");
              },
          .run = [wanted](Context& context) { return runs(context, *wanted); }};
}

}  // namespace drover::commands
