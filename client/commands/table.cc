// `drover table`
#include <CLI/CLI.hpp>
#include <memory>

#include "absl/strings/str_cat.h"
#include "commands/command.h"
#include "commands/csv.h"
#include "commands/json.h"
#include "commands/new_file.h"
#include "screen/numbers.h"

namespace drover::commands {
namespace {

struct Wanted {
  std::string study;
  std::string file;
};

Exit to_file(Context& context, const std::string& file, const std::string& text, std::int64_t count) {
  const absl::Status status = write_file(file, text);
  if (!status.ok()) return context.output.fail(status);
  context.output.say(absl::StrCat("wrote ", screen::counted(count, "candidate", "candidates"), " to ", file));
  return Exit::kDone;
}

Exit table(Context& context, const Wanted& wanted) {
  Output& output = context.output;
  const auto coordinator = context.connect();
  if (!coordinator.ok()) return output.fail(coordinator.status());
  const auto study = (*coordinator)->study(wanted.study);
  if (!study.ok()) return output.fail(study.status());
  std::int64_t count = 0;
  std::string text = output.json() ? "" : csv_head(*study);
  const absl::Status status = (*coordinator)->candidates(wanted.study, [&](const v1::Candidate& candidate) {
    ++count;
    text += output.json() ? text_of(to_json(candidate)) + "\n" : csv_line(*study, candidate);
    if (!wanted.file.empty()) return true;
    output.data(text);
    text.clear();
    return !output.closed();
  });
  if (!status.ok()) return output.fail(status);
  if (!wanted.file.empty()) return to_file(context, wanted.file, text, count);
  output.data(text);
  return Exit::kDone;
}

}  // namespace

Command table_command() {
  const auto wanted = std::make_shared<Wanted>();
  return {.name = "table",
          .summary = "Every candidate of a study as comma-separated values",
          .details =
              "Columns: candidate, variables, verdict, objectives, constraints, violation. With --json one\n"
              "candidate a line instead.",
          .examples = {"drover table penstock -o penstock.csv", "drover table penstock | head"},
          .options =
              [wanted](CLI::App& app) {
                app.add_option("STUDY", wanted->study, "name of the study")->required();
                app.add_option("-o,--output", wanted->file, "write to this file instead of standard output");
              },
          .run = [wanted](Context& context) { return table(context, *wanted); }};
}

}  // namespace drover::commands
