#include "commands/words.h"

#include <algorithm>
#include <string_view>

#include "absl/strings/ascii.h"

namespace drover::commands {
namespace {

// "STUDY_STATE_ACTIVE" -> "active".
std::string lower(const std::string& name, std::string_view prefix) {
  if (name.empty()) return "unknown";
  std::string word = absl::AsciiStrToLower(name.substr(std::min(prefix.size(), name.size())));
  return word == "unspecified" ? "" : word;
}

}  // namespace

std::string word(v1::StudyState state) { return lower(v1::StudyState_Name(state), "STUDY_STATE_"); }
std::string word(v1::StopReason reason) { return lower(v1::StopReason_Name(reason), "STOP_REASON_"); }
std::string word(v1::RunState state) { return lower(v1::RunState_Name(state), "RUN_STATE_"); }
std::string word(v1::Ending ending) { return lower(v1::Ending_Name(ending), "ENDING_"); }
std::string word(v1::FailureKind failure) { return lower(v1::FailureKind_Name(failure), "FAILURE_KIND_"); }
std::string word(v1::CandidateVerdict verdict) {
  // A candidate whose verdict is still open has a word of its own.
  const std::string text = lower(v1::CandidateVerdict_Name(verdict), "CANDIDATE_VERDICT_");
  return text.empty() ? "out" : text;
}
std::string word(v1::Origin origin) { return lower(v1::Origin_Name(origin), "ORIGIN_"); }

std::string spaced(std::string word) {
  std::replace(word.begin(), word.end(), '_', ' ');
  return word;
}

}  // namespace drover::commands
