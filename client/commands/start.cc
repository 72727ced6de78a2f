// `drover start`
#include <CLI/CLI.hpp>
#include <memory>

#include "absl/strings/str_cat.h"
#include "commands/command.h"
#include "commands/json.h"
#include "commands/refusal.h"
#include "screen/numbers.h"
#include "studyfile/study_file.h"

namespace drover::commands {
namespace {

std::string started(const v1::Study& study) {
  const std::int64_t runs = study.spec().budget().runs();
  return absl::StrCat("study ", study.name(), " started",
                      runs > 0 ? absl::StrCat(": up to ", screen::counted(runs, "run", "runs")) : "",
                      study.slots() == 0 ? "; no worker could run it yet, it waits for one" : "",
                      "\nto see how far it is: drover show ", study.name());
}

Exit start(Context& context, const std::string& path) {
  const auto file = studyfile::read_study_file(path);
  if (!file.ok()) return unreadable(context.output, file.status());
  if (!file->complaints.empty()) return context.output.complain(file->complaints);
  const auto coordinator = context.connect();
  if (!coordinator.ok()) return context.output.fail(coordinator.status());
  const auto study = (*coordinator)->start(file->spec, context.surroundings.user);
  if (!study.ok()) return refuse(context.output, study.status(), *file);
  context.output.say(started(*study));
  if (context.output.json()) context.output.document(to_json(*study));
  return Exit::kDone;
}

}  // namespace

Command start_command() {
  const auto path = std::make_shared<std::string>();
  return {.name = "start",
          .summary = "Hand a study to the coordinator, which has its workers search",
          .details = "Returns at once; the study goes on without this program.",
          .examples = {"drover start penstock.toml", "drover start penstock.toml --coordinator unix:/run/drover/lab"},
          .options = [path](CLI::App& app) { app.add_option("STUDY.toml", *path, "the study file")->required(); },
          .run = [path](Context& context) { return start(context, *path); }};
}

}  // namespace drover::commands
