#include "study/findings.h"

#include <cmath>
#include <utility>

#include "absl/strings/match.h"
#include "absl/strings/str_cat.h"
#include "study/limits.h"
#include "study/names.h"
#include "study/units.h"
#include "study/wording.h"

namespace drover::study {

void Findings::add(std::string field, std::string text, Advice advice) {
  if (problems_.size() >= static_cast<std::size_t>(kMostProblems)) return;
  v1::Problem& problem = problems_.emplace_back();
  problem.set_field(std::move(field));
  problem.set_text(std::move(text));
  problem.set_advice(std::move(advice.text));
  problem.set_nearest(std::move(advice.nearest));
}

std::string Findings::nearest_for(std::string_view text, std::span<const std::string> known) const {
  return problems_.size() < static_cast<std::size_t>(kMostNearest) ? nearest(text, known) : "";
}

std::string field_of(std::string_view table, int index, std::string_view key) {
  std::string field = std::string(table) + "[" + std::to_string(index) + "]";
  if (!key.empty()) field.append(".").append(key);
  return field;
}

const v1::Accepted* Draft::accepted(const std::string& name) const {
  if (code == nullptr) return nullptr;
  for (const v1::Accepted& accepts : code->accepts()) {
    if (accepts.name() == name) return &accepts;
  }
  return nullptr;
}

std::vector<std::string> Draft::names(const std::map<std::string, NameUse>& uses) {
  std::vector<std::string> names;
  for (const auto& [name, use] : uses) names.push_back(name);
  return names;
}

bool finite(Draft& draft, const std::string& field, double value) {
  if (std::isfinite(value)) return true;
  draft.findings.add(field, absl::StrCat(number_text(value), " is not a finite number"));
  return false;
}

bool short_enough(Draft& draft, const std::string& field, const std::string& text, std::size_t most) {
  if (text.size() <= most) return true;
  draft.findings.add(field, absl::StrCat(quoted(text), " has ", text.size(), " bytes; at most ", most));
  return false;
}

void check_unit(Draft& draft, const std::string& field, const std::string& from, const std::string& to,
                const std::string& whose) {
  const absl::Status status = Units::shared().conversion(from, to).status();
  if (status.ok()) return;
  const std::string why(status.message());
  if (absl::StrContains(why, "does not match")) {
    draft.findings.add(field, absl::StrCat(why, ", ", whose));
    return;
  }
  const std::string near = Units::nearest_unit(from);
  draft.findings.add(field, absl::StrCat(why, "; it cannot be compared with ", quoted(to), ", ", whose),
                     {"units are written like m, mm, m3/s, kW.h, degC, MPa", near});
}

}  // namespace drover::study
