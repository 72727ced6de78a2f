#include "screen/progress.h"

#include <algorithm>
#include <vector>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "link/duration.h"
#include "screen/numbers.h"

namespace drover::screen {
namespace {

absl::Time to_time(const google::protobuf::Timestamp& stamp) {
  return absl::FromUnixSeconds(stamp.seconds()) + absl::Nanoseconds(stamp.nanos());
}

std::string runs_text(const v1::Study& study) {
  const std::int64_t budget = study.spec().budget().runs();
  return absl::StrCat("runs ", whole(settled(study.runs())), budget > 0 ? absl::StrCat("/", whole(budget)) : "");
}

std::string best_text(const v1::Study& study) {
  if (!study.has_best() || study.best().objectives().empty()) return "no feasible design yet";
  return absl::StrCat("best ", value(study.best().objectives(0)), " (feasible)");
}

}  // namespace

std::int64_t settled(const v1::RunCounts& runs) { return runs.evaluated() + runs.failed(); }

std::int64_t in_hand(const v1::RunCounts& runs) { return runs.granted() + runs.begun() + runs.stopping(); }

std::int64_t open(const v1::RunCounts& runs) {
  return runs.waiting() + in_hand(runs) + runs.parked() + runs.set_aside();
}

std::optional<absl::Duration> time_left(const v1::Study& study, absl::Time now) {
  const bool active = study.state() == v1::STUDY_STATE_ACTIVE;
  if (!active && study.state() != v1::STUDY_STATE_FINISHING) return std::nullopt;
  std::optional<absl::Duration> left;
  const std::int64_t budget = study.spec().budget().runs();
  if (study.has_mean_run_time() && study.slots() > 0 && (budget > 0 || !active)) {
    const std::int64_t to_come =
        active ? std::max<std::int64_t>(0, budget - settled(study.runs())) : open(study.runs());
    const std::int64_t rounds = (to_come + study.slots() - 1) / study.slots();
    left = link::from_proto(study.mean_run_time()) * rounds;
  }
  if (active && study.spec().budget().has_deadline()) {
    const absl::Duration until = std::max(to_time(study.spec().budget().deadline()) - now, absl::ZeroDuration());
    left = std::min(left.value_or(until), until);
  }
  return left;
}

std::string progress_line(const v1::Study& study, absl::Time now) {
  std::vector<std::string> parts = {runs_text(study), best_text(study)};
  const v1::RunCounts& runs = study.runs();
  if (study.slots() > 0) {
    parts.push_back(
        absl::StrCat("slots ", std::min<std::int64_t>(in_hand(runs), study.slots()), "/", study.slots(), " busy"));
  } else {
    parts.push_back("no worker");
  }
  if (runs.parked() > 0) parts.push_back(absl::StrCat(whole(runs.parked()), " parked"));
  if (runs.set_aside() > 0) parts.push_back(absl::StrCat(whole(runs.set_aside()), " set aside"));
  switch (study.state()) {
    case v1::STUDY_STATE_PAUSED:
      parts.push_back("paused");
      break;
    case v1::STUDY_STATE_STOPPING:
      parts.push_back("stopping");
      break;
    default:
      break;
  }
  if (const auto left = time_left(study, now)) parts.push_back(absl::StrCat(about(*left), " left"));
  return absl::StrJoin(parts, "  ");
}

}  // namespace drover::screen
