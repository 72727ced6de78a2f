// `drover show`
#include <CLI/CLI.hpp>
#include <memory>

#include "commands/command.h"
#include "commands/describe.h"
#include "commands/json.h"

namespace drover::commands {
namespace {

Exit show(Context& context, const std::string& name) {
  const auto coordinator = context.connect();
  if (!coordinator.ok()) return context.output.fail(coordinator.status());
  const auto study = (*coordinator)->study(name);
  if (!study.ok()) return context.output.fail(study.status());
  if (context.output.json()) {
    context.output.document(to_json(*study));
  } else {
    context.output.data(describe(*study, context.surroundings.clock.wall(), context.output.data_screen()));
  }
  return Exit::kDone;
}

}  // namespace

Command show_command() {
  const auto name = std::make_shared<std::string>();
  return {.name = "show",
          .summary = "How far a study is, and its best design so far",
          .details = "",
          .examples = {"drover show penstock", "drover show penstock --json"},
          .options = [name](CLI::App& app) { app.add_option("STUDY", *name, "name of the study")->required(); },
          .run = [name](Context& context) { return show(context, *name); }};
}

}  // namespace drover::commands
