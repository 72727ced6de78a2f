// The [study] table: its name, its code, replicates, tags.
#include <algorithm>
#include <set>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "study/findings.h"
#include "study/limits.h"
#include "study/wording.h"

namespace drover::study {
namespace {

bool is_study_name(const std::string& name) {
  const auto plain = [](char c) {
    return absl::ascii_isalnum(static_cast<unsigned char>(c)) || c == '-' || c == '_' || c == '.';
  };
  return absl::ascii_isalnum(static_cast<unsigned char>(name.front())) && std::all_of(name.begin(), name.end(), plain);
}

void check_name(Draft& draft) {
  const std::string& name = draft.given.name();
  if (name.empty()) {
    draft.findings.add("study.name", "the study has no name");
  } else if (name.size() > kMostNameLength) {
    short_enough(draft, "study.name", name, kMostNameLength);
  } else if (!is_study_name(name)) {
    draft.findings.add("study.name", absl::StrCat(quoted(name), " is no name for a study"),
                       {"letters, digits, '-', '_' and '.', beginning with a letter or a digit", ""});
  }
}

void unknown_code(Draft& draft, const v1::CodeUse& use) {
  std::set<std::string> known;
  for (const v1::CodeDefinition& code : draft.context.codes) known.insert(code.name());
  const std::vector<std::string> names(known.begin(), known.end());
  std::string advice = absl::StrCat("known codes: ", listed(names));
  if (names.empty()) advice = "no worker has brought any code; start drover-worker with --codes";
  const bool other_digest = known.contains(use.code());
  const std::string text = other_digest ? absl::StrCat("the definition of code ", quoted(use.code()), " with digest ",
                                                       printable(use.digest(), 64), " is not known")
                                        : absl::StrCat("code ", quoted(use.code()), " is not known");
  draft.findings.add("study.code", text, {advice, other_digest ? "" : draft.findings.nearest_for(use.code(), names)});
}

void check_code(Draft& draft) {
  const v1::StudySpec& given = draft.given;
  if (given.codes_size() == 0 || given.codes(0).code().empty()) {
    draft.findings.add("study.code", "the study names no code");
    return;
  }
  if (given.codes_size() > 1 || given.codes(0).role() == v1::CODE_ROLE_COARSE ||
      !v1::CodeRole_IsValid(given.codes(0).role())) {
    draft.findings.add("study.code",
                       "a study has exactly one code, in the role fine; coarse codes are not available yet");
    return;
  }
  const v1::CodeUse& use = given.codes(0);
  if (!(use.cost() >= 0.0) || !finite(draft, "study.code", use.cost())) {
    draft.findings.add("study.code", absl::StrCat("its cost ", number_text(use.cost()), " is not above 0"));
  }
  draft.code = find_code(given, draft.context.codes);
  if (draft.code == nullptr) {
    unknown_code(draft, use);
    return;
  }
  v1::CodeUse& effective = *draft.effective.mutable_codes(0);
  effective.set_role(v1::CODE_ROLE_FINE);
  effective.set_digest(draft.code->digest());
  if (use.cost() == 0.0) effective.set_cost(1.0);
  for (const v1::CodeOutput& output : draft.code->outputs()) {
    draft.measures[output.name()] = {NameUse::Kind::kOutput, "", output.unit()};
  }
}

void check_tags(Draft& draft) {
  if (draft.given.tags_size() > kMostTags) {
    draft.findings.add("study.tags", absl::StrCat(draft.given.tags_size(), " tags; at most ", kMostTags));
    return;
  }
  std::set<std::string> seen;
  for (const std::string& tag : draft.given.tags()) {
    if (tag.empty()) draft.findings.add("study.tags", "a tag is empty");
    short_enough(draft, "study.tags", tag, kMostNameLength);
    if (!seen.insert(tag).second) draft.findings.add("study.tags", absl::StrCat(quoted(tag), " is given twice"));
  }
}

}  // namespace

const v1::CodeDefinition* find_code(const v1::StudySpec& spec, std::span<const v1::CodeDefinition> codes) {
  if (spec.codes_size() == 0) return nullptr;
  const v1::CodeUse& use = spec.codes(0);
  const v1::CodeDefinition* found = nullptr;
  for (const v1::CodeDefinition& code : codes) {
    if (code.name() == use.code() && (use.digest().empty() || code.digest() == use.digest())) found = &code;
  }
  return found;
}

void check_study(Draft& draft) {
  check_name(draft);
  check_code(draft);
  const int replicates = draft.given.replicates();
  if (replicates < 0 || replicates > kMostReplicates) {
    draft.findings.add("study.replicates", absl::StrCat(replicates, " is not between 1 and ", kMostReplicates));
  }
  draft.effective.set_replicates(std::max(1, replicates));
  check_tags(draft);
  if (!v1::LateReports_IsValid(draft.given.late())) draft.findings.add("study.late", "no such rule for late reports");
  if (draft.given.late() == v1::LATE_REPORTS_UNSPECIFIED) draft.effective.set_late(v1::LATE_REPORTS_ACCEPT);
}

}  // namespace drover::study
