#include "dispatch/times.h"

#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::dispatch {

absl::Status Times::validate() const {
  const std::pair<const char*, absl::Duration> all[] = {{"renew_every", renew_every},
                                                        {"lease", lease},
                                                        {"grace", grace},
                                                        {"patience", patience},
                                                        {"retry_first", retry_first},
                                                        {"retry_most", retry_most},
                                                        {"longest_poll", longest_poll},
                                                        {"late", late}};
  for (const auto& [name, value] : all) {
    if (value <= absl::ZeroDuration()) {
      return absl::InvalidArgumentError(
          absl::StrCat("times.", name, " is ", absl::FormatDuration(value), "; it must be above zero"));
    }
  }
  if (renew_every * 2 > lease) {
    return absl::InvalidArgumentError(absl::StrCat(
        "times.renew_every (", absl::FormatDuration(renew_every), ") must be at most half of times.lease (",
        absl::FormatDuration(lease), "), or one lost renewal would lapse a lease"));
  }
  return absl::OkStatus();
}

}  // namespace drover::dispatch
