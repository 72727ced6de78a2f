// `drover solo`
#include <CLI/CLI.hpp>
#include <memory>

#include "commands/command.h"
#include "commands/refusal.h"
#include "commands/solo_run.h"
#include "commands/study_paths.h"

namespace drover::commands {
namespace {

std::string again(const SoloOptions& options) {
  std::string command = "drover solo " + options.file;
  if (!options.codes.empty()) command += " --codes " + options.codes;
  if (!options.data.empty()) command += " --data " + options.data;
  return command;
}

Exit solo(Context& context, SoloOptions options) {
  options.command = again(options);
  const auto file = studyfile::read_study_file(options.file);
  if (!file.ok()) return unreadable(context.output, file.status());
  if (!file->complaints.empty()) return context.output.complain(file->complaints);
  if (options.slots < 0) return context.output.fail(absl::InvalidArgumentError("--slots is below 1; write 1 or more"));
  if (options.slots == 0) options.slots = usual_slots();
  if (options.codes.empty()) options.codes = codes_folder_of(options.file);
  if (options.data.empty()) options.data = data_folder_of(options.file);
  return SoloRun(context, options, *file).run();
}

}  // namespace

Command solo_command() {
  const auto options = std::make_shared<SoloOptions>();
  options->slots = 0;
  return {.name = "solo",
          .summary = "Search on this machine alone, or carry on where an earlier solo stopped",
          .details =
              "Starts a coordinator and a worker for itself and ends them again. Everything is kept in a data\n"
              "folder; the same command carries on from there, whatever ended the earlier one. At the end\n"
              "the folder holds table.csv with every candidate, and best.json.",
          .examples = {"drover solo penstock.toml", "drover solo penstock.toml --codes ~/codes --slots 8"},
          .options =
              [options](CLI::App& app) {
                app.add_option("STUDY.toml", options->file, "the study file")->required();
                app.add_option("--codes", options->codes,
                               "folder of code definitions [the folder codes beside the study file]");
                app.add_option("--slots", options->slots, "how many runs at once [one a processor]");
                app.add_option("--data", options->data,
                               "where everything is kept [beside the study file, .drover for .toml]");
              },
          .run = [options](Context& context) { return solo(context, *options); },
          .asks_coordinator = false};
}

}  // namespace drover::commands
