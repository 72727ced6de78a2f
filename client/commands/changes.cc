// `drover pause`, `drover resume` and `drover stop`
#include <CLI/CLI.hpp>
#include <memory>

#include "absl/strings/str_cat.h"
#include "commands/command.h"
#include "commands/json.h"
#include "commands/words.h"
#include "screen/numbers.h"
#include "screen/progress.h"

namespace drover::commands {
namespace {

using Change = absl::StatusOr<v1::Study> (Coordinator::*)(const std::string&);

// What is different now, and the next command.
std::string changed(const v1::Study& study) {
  const std::string& name = study.name();
  const std::string running = screen::counted(screen::in_hand(study.runs()), "run", "runs");
  switch (study.state()) {
    case v1::STUDY_STATE_PAUSED:
      return absl::StrCat("study ", name, " is paused: no new runs are handed out; ", running,
                          " on workers will still be finished\nto go on: drover resume ", name);
    case v1::STUDY_STATE_ACTIVE:
      return absl::StrCat("study ", name, " goes on\nto see how far it is: drover show ", name);
    case v1::STUDY_STATE_STOPPING:
      return absl::StrCat("study ", name, " is stopping: what waited is withdrawn, ", running,
                          " on workers will be ended\nto see when it is over: drover show ", name);
    case v1::STUDY_STATE_STOPPED:
      return absl::StrCat("study ", name, " is stopped for good; its results stay\nto see them: drover best ", name);
    default:
      return absl::StrCat("study ", name, " is ", word(study.state()), "\nto see more: drover show ", name);
  }
}

Command change_command(std::string name, std::string summary, std::string details, Change change) {
  const auto study = std::make_shared<std::string>();
  const auto run = [study, change](Context& context) {
    const auto coordinator = context.connect();
    if (!coordinator.ok()) return context.output.fail(coordinator.status());
    const auto after = (coordinator->get()->*change)(*study);
    if (!after.ok()) return context.output.fail(after.status());
    context.output.say(changed(*after));
    if (context.output.json()) context.output.document(to_json(*after));
    return Exit::kDone;
  };
  return {.name = name,
          .summary = std::move(summary),
          .details = std::move(details),
          .examples = {absl::StrCat("drover ", name, " penstock")},
          .options = [study](CLI::App& app) { app.add_option("STUDY", *study, "name of the study")->required(); },
          .run = run};
}

}  // namespace

Command pause_command() {
  return change_command("pause", "Hand out no new runs of a study; what runs goes on",
                        "The study can be resumed at any time. Nothing is lost.", &Coordinator::pause);
}

Command resume_command() {
  return change_command("resume", "Go on with a study that is paused or failed", "", &Coordinator::resume);
}

Command stop_command() {
  return change_command("stop", "End a study for good; its results stay",
                        "Withdraws the runs that wait and ends those that run. This cannot be undone; to go on later,\n"
                        "pause the study instead.",
                        &Coordinator::stop);
}

}  // namespace drover::commands
