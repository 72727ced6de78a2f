// `drover best`
#include <CLI/CLI.hpp>
#include <memory>
#include <optional>

#include "absl/strings/str_cat.h"
#include "commands/command.h"
#include "commands/describe.h"
#include "commands/json.h"

namespace drover::commands {
namespace {

Exit none_yet(Context& context, const std::string& name) {
  context.output.say(absl::StrCat("study ", name, " has no feasible design yet; see: drover show ", name));
  if (context.output.json()) context.output.document({{"study", name}, {"best", nullptr}});
  return Exit::kNo;
}

Exit best(Context& context, const std::string& name) {
  const auto coordinator = context.connect();
  if (!coordinator.ok()) return context.output.fail(coordinator.status());
  const auto study = (*coordinator)->study(name);
  if (!study.ok()) return context.output.fail(study.status());
  if (!study->has_best()) return none_yet(context, name);
  const auto candidate = (*coordinator)->candidate(name, study->best().number());
  if (!candidate.ok()) return context.output.fail(candidate.status());
  if (context.output.json()) {
    context.output.document({{"study", name}, {"best", to_json(*candidate)}});
    return Exit::kDone;
  }
  std::optional<v1::Candidate> baseline;
  if (has_baseline(study->spec()) && candidate->number() != 1) {
    const auto first = (*coordinator)->candidate(name, 1);
    if (first.ok()) baseline = *first;
  }
  context.output.data(describe(*candidate, study->spec(), baseline));
  return Exit::kDone;
}

}  // namespace

Command best_command() {
  const auto name = std::make_shared<std::string>();
  return {.name = "best",
          .summary = "The best feasible design of a study, condition by condition",
          .details = "Ends with 1 while there is none.",
          .examples = {"drover best penstock", "drover best penstock --json"},
          .options = [name](CLI::App& app) { app.add_option("STUDY", *name, "name of the study")->required(); },
          .run = [name](Context& context) { return best(context, *name); }};
}

}  // namespace drover::commands
