#include "session/options.h"

#include <array>
#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::session {

absl::Status Options::validate() const {
  if (worker.empty()) return absl::InvalidArgumentError("name: a worker needs one");
  if (slots < 1) return absl::InvalidArgumentError(absl::StrCat("slots: ", slots, " is below 1"));
  for (const auto& [name, path] :
       {std::pair("spool", &spool), std::pair("scratch", &scratch), std::pair("runner", &runner)}) {
    if (path->empty() || path->front() != '/') {
      return absl::InvalidArgumentError(absl::StrCat(name, ": \"", *path, "\" is no absolute path"));
    }
  }
  const std::array<std::pair<const char*, absl::Duration>, 7> spans = {{{"poll", times.poll},
                                                                        {"retry_first", times.retry_first},
                                                                        {"retry_most", times.retry_most},
                                                                        {"disk_retry", times.disk_retry},
                                                                        {"stop_margin", times.stop_margin},
                                                                        {"farewell", times.farewell},
                                                                        {"prune_every", times.prune_every}}};
  for (const auto& [name, span] : spans) {
    if (span <= absl::ZeroDuration())
      return absl::InvalidArgumentError(absl::StrCat("times.", name, " must be above 0"));
  }
  if (!fresh_id) return absl::InvalidArgumentError("fresh_id: nothing makes request ids");
  return absl::OkStatus();
}

}  // namespace drover::session
