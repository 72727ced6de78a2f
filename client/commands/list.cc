// `drover list`
#include <CLI/CLI.hpp>

#include "absl/strings/str_cat.h"
#include "commands/command.h"
#include "commands/json.h"
#include "commands/words.h"
#include "screen/numbers.h"
#include "screen/progress.h"
#include "screen/table.h"

namespace drover::commands {
namespace {

std::string runs_text(const v1::Study& study) {
  const std::int64_t budget = study.spec().budget().runs();
  const std::string settled = screen::whole(screen::settled(study.runs()));
  return budget > 0 ? absl::StrCat(settled, "/", screen::whole(budget)) : settled;
}

Exit list(Context& context) {
  const auto coordinator = context.connect();
  if (!coordinator.ok()) return context.output.fail(coordinator.status());
  const auto studies = (*coordinator)->list();
  if (!studies.ok()) return context.output.fail(studies.status());
  if (context.output.json()) {
    for (const v1::Study& study : *studies) context.output.document(to_json(study));
    return Exit::kDone;
  }
  if (studies->empty()) {
    context.output.say("no studies yet; start one with: drover start STUDY.toml");
    return Exit::kDone;
  }
  screen::Table table({{"study"}, {"state"}, {"runs", screen::Align::kRight}, {"owner"}, {"what it does"}});
  for (const v1::Study& study : *studies) {
    table.add({study.name(), word(study.state()), runs_text(study), study.owner(), study.sentence()});
  }
  context.output.data(table.text());
  return Exit::kDone;
}

}  // namespace

Command list_command() {
  return {.name = "list",
          .summary = "The coordinator's studies, by name",
          .details = "With --json one study a line.",
          .examples = {"drover list", "drover list --json"},
          .options = [](CLI::App&) {},
          .run = list};
}

}  // namespace drover::commands
