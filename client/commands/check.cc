// `drover check`
#include <CLI/CLI.hpp>
#include <memory>

#include "absl/strings/str_cat.h"
#include "commands/command.h"
#include "commands/json.h"
#include "commands/private_site.h"
#include "commands/refusal.h"
#include "screen/numbers.h"
#include "status/try.h"

namespace drover::commands {
namespace {

struct Wanted {
  std::string file;
  std::string codes;
};

// Asks a coordinator and a worker that exist for this question alone.
absl::StatusOr<v1::CheckStudyResponse> ask_privately(Context& context, const v1::StudySpec& spec,
                                                     const std::string& codes) {
  DROVER_ASSIGN(const std::unique_ptr<DataFolder> folder, DataFolder::temporary());
  DROVER_ASSIGN(const std::unique_ptr<PrivateSite> site,
                PrivateSite::start({.programs = context.surroundings.programs, .codes = codes, .slots = 1}, *folder,
                                   context.surroundings.clock, context.surroundings.interruption, context.output));
  DROVER_TRY(site->wait_for_worker());
  DROVER_ASSIGN(v1::CheckStudyResponse response, site->coordinator().check(spec));
  site->end();
  return response;
}

absl::StatusOr<v1::CheckStudyResponse> ask(Context& context, const v1::StudySpec& spec, const std::string& codes) {
  if (!codes.empty()) {
    context.surroundings.interruption.expect();
    return ask_privately(context, spec, codes);
  }
  DROVER_ASSIGN(const std::unique_ptr<Coordinator> coordinator, context.connect());
  return coordinator->check(spec);
}

std::string fine(const studyfile::StudyFile& file, const v1::CheckStudyResponse& answer) {
  const std::int64_t per_candidate = std::max<std::int64_t>(1, answer.runs_per_candidate());
  const std::int64_t budget = file.spec.budget().runs();
  std::string text = absl::StrCat(file.name, ": study ", file.spec.name(), " could start\n  ",
                                  screen::counted(per_candidate, "run", "runs"), " per candidate (every condition, ",
                                  "every replicate)\n");
  if (budget > 0) {
    absl::StrAppend(&text, "  ", screen::counted(budget, "run", "runs"), " in the budget are ",
                    screen::counted(budget / per_candidate, "candidate", "candidates"), "\n");
  } else {
    absl::StrAppend(&text, "  no limit of runs in the budget\n");
  }
  const v1::SearchSpec& search = answer.effective().search();
  if (!search.method().empty()) absl::StrAppend(&text, "  searched by ", search.method(), "\n");
  return text;
}

Exit check(Context& context, const Wanted& wanted) {
  const auto file = studyfile::read_study_file(wanted.file);
  if (!file.ok()) return unreadable(context.output, file.status());
  if (!file->complaints.empty()) return context.output.complain(file->complaints);
  const auto answer = ask(context, file->spec, wanted.codes);
  if (!answer.ok()) return context.output.fail(answer.status());
  if (answer->problems_size() > 0) return context.output.complain(located(answer->problems(), *file));
  if (!context.output.json()) {
    context.output.data(fine(*file, *answer));
    return Exit::kDone;
  }
  nlohmann::json document = {{"ok", true},
                             {"problems", nlohmann::json::array()},
                             {"study", file->spec.name()},
                             {"runs_per_candidate", answer->runs_per_candidate()},
                             {"method", answer->effective().search().method()}};
  if (file->spec.budget().runs() > 0) document["budget_runs"] = file->spec.budget().runs();
  context.output.document(document);
  return Exit::kDone;
}

}  // namespace

Command check_command() {
  const auto wanted = std::make_shared<Wanted>();
  return {.name = "check",
          .summary = "Say everything that is wrong with a study file, without starting it",
          .details = "Asks the coordinator, whose workers know the codes; with --codes nobody but this machine.",
          .examples = {"drover check penstock.toml", "drover check penstock.toml --codes codes"},
          .options =
              [wanted](CLI::App& app) {
                app.add_option("STUDY.toml", wanted->file, "the study file")->required();
                app.add_option("--codes", wanted->codes, "folder of code definitions to check against");
              },
          .run = [wanted](Context& context) { return check(context, *wanted); }};
}

}  // namespace drover::commands
