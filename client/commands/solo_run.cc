#include "commands/solo_run.h"

#include <utility>
#include <vector>

#include "absl/cleanup/cleanup.h"
#include "absl/strings/str_cat.h"
#include "commands/changed_spec.h"
#include "commands/describe.h"
#include "commands/refusal.h"
#include "commands/summary.h"
#include "commands/words.h"
#include "link/text.h"
#include "screen/numbers.h"
#include "screen/progress.h"
#include "status/try.h"

namespace drover::commands {
namespace {

constexpr absl::Duration kGlance = absl::Milliseconds(500);  // how long one question for news may take
constexpr absl::Duration kCalm = absl::Milliseconds(100);    // least time between two

std::string progress_text(const v1::Study& study) {
  const std::int64_t budget = study.spec().budget().runs();
  const std::string settled = screen::whole(screen::settled(study.runs()));
  return budget > 0 ? absl::StrCat(settled, " of ", screen::counted(budget, "run", "runs"))
                    : screen::counted(screen::settled(study.runs()), "run", "runs");
}

// Every difference at its place in the file.
std::vector<studyfile::Complaint> as_complaints(const std::vector<ChangedField>& changed,
                                                const studyfile::StudyFile& file) {
  std::vector<studyfile::Complaint> complaints;
  for (const ChangedField& change : changed) {
    const std::string now = change.now.empty() ? "is not there" : absl::StrCat("is ", change.now);
    const std::string then = change.then.empty() ? "it was not there" : absl::StrCat("it was ", change.then);
    complaints.push_back({.file = file.name,
                          .place = file.places.find(change.field),
                          .field = change.field,
                          .text = absl::StrCat(change.field, " ", now, "; ", then, " when the study was started"),
                          .advice = "",
                          .nearest = ""});
  }
  studyfile::sort_by_place(complaints);
  return complaints;
}

}  // namespace

SoloRun::SoloRun(Context& context, const SoloOptions& options, const studyfile::StudyFile& file)
    : context_(context),
      options_(options),
      file_(file),
      interruption_(context.surroundings.interruption),
      output_(context.output) {}

Exit SoloRun::run() {
  interruption_.expect();
  const auto folder = DataFolder::open(options_.data);
  if (!folder.ok()) return gone(folder.status());
  output_.say(absl::StrCat("starting a coordinator and a worker in ", (*folder)->path()));
  const auto site =
      PrivateSite::start({.programs = context_.surroundings.programs, .codes = options_.codes, .slots = options_.slots},
                         **folder, context_.surroundings.clock, interruption_, output_);
  if (!site.ok()) return gone(site.status());
  const absl::StatusOr<Exit> exit = search(**site, **folder);
  const bool stopped = !exit.ok() && interruption_.happened();
  if (stopped) output_.say("stopping; a second Ctrl-C ends at once");
  (*site)->end();
  if (stopped) return interrupted(**folder);
  return exit.ok() ? *exit : gone(exit.status());
}

absl::StatusOr<Exit> SoloRun::search(PrivateSite& site, const DataFolder& folder) {
  Exit exit = Exit::kDone;
  DROVER_ASSIGN(v1::Study study, begin(site, &exit));
  if (exit != Exit::kDone) return exit;
  if (!is_over(study.state())) {
    output_.say(absl::StrCat("to look at it from elsewhere: drover show ", file_.spec.name(), " --coordinator ",
                             site.address()));
    DROVER_ASSIGN(study, follow(site, std::move(study)));
  }
  return summarise(site.coordinator(), study, folder, output_);
}

absl::StatusOr<v1::Study> SoloRun::begin(PrivateSite& site, Exit* exit) {
  absl::StatusOr<v1::Study> known = site.coordinator().study(file_.spec.name());
  if (known.ok()) return carry_on(site, *std::move(known), exit);
  if (absl::IsNotFound(known.status())) return start_new(site, exit);
  return known.status();
}

absl::StatusOr<v1::Study> SoloRun::start_new(PrivateSite& site, Exit* exit) {
  // Before a worker has enrolled, the coordinator knows no code.
  DROVER_TRY(site.wait_for_worker());
  const absl::StatusOr<v1::Study> study = site.coordinator().start(file_.spec, context_.surroundings.user);
  if (study.ok()) {
    output_.say(
        absl::StrCat("study ", file_.spec.name(), " started on ", screen::counted(options_.slots, "slot", "slots")));
    return study;
  }
  if (!absl::IsInvalidArgument(study.status())) return study;
  *exit = refuse(output_, study.status(), file_);
  return v1::Study();
}

absl::StatusOr<v1::Study> SoloRun::carry_on(PrivateSite& site, v1::Study study, Exit* exit) {
  const std::vector<ChangedField> changed = changed_fields(file_.spec, study.spec());
  if (!changed.empty()) {
    *exit = output_.complain(as_complaints(changed, file_));
    output_.say(absl::StrCat("drover: ", file_.name, " has changed since its study was started, with ",
                             progress_text(study),
                             " done; put it back to carry on, or give the study another name, "
                             "or a new folder with --data"));
    return study;
  }
  if (study.state() == v1::STUDY_STATE_PAUSED || study.state() == v1::STUDY_STATE_FAILED) {
    output_.say(absl::StrCat("study ", study.name(), " was ", word(study.state()), "; it is resumed"));
    DROVER_ASSIGN(study, site.coordinator().resume(study.name()));
  }
  if (!is_over(study.state())) output_.say(absl::StrCat("carrying on with ", progress_text(study), " done"));
  return study;
}

absl::StatusOr<v1::Study> SoloRun::follow(PrivateSite& site, v1::Study study) {
  screen::LiveLine line(output_.messages(), output_.message_screen(), screen::width_of(fileno(output_.messages())));
  site.set_tell([&line](const std::string& text) { line.print(text); });
  const absl::Cleanup back = [this, &site] { site.set_tell([this](const std::string& text) { output_.say(text); }); };
  const link::Clock& clock = context_.surroundings.clock;
  std::string told;
  while (!is_over(study.state())) {
    // Why nothing goes on, where that can be said.
    if (study.slots() == 0 && study.sentence() != told) line.print(link::printable(told = study.sentence()));
    line.show(screen::progress_line(study, clock.wall()), clock.steady());
    if (interruption_.wait(kCalm)) return absl::CancelledError("interrupted");
    DROVER_TRY(site.tend());
    DROVER_ASSIGN(study, site.coordinator().study_after(file_.spec.name(), study.revision(), kGlance));
  }
  return study;
}

Exit SoloRun::interrupted(const DataFolder& folder) {
  output_.say(absl::StrCat("stopped; nothing that was finished is lost, it is in ", folder.path(),
                           "\nto carry on, give the same command again: ", options_.command));
  return Exit::kNo;
}

// The coordinator is ours: that it cannot be reached is no answer of its own.
Exit SoloRun::gone(const absl::Status& status) {
  if (absl::IsNotFound(status) || absl::IsFailedPrecondition(status)) {
    output_.fail(status);
    return Exit::kWrongInput;
  }
  return output_.fail(status);
}

}  // namespace drover::commands
