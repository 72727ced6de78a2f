// [study], [search] and [budget].
#include <cstdint>
#include <limits>

#include "absl/strings/str_cat.h"
#include "studyfile/parts.h"

namespace drover::studyfile {
namespace {

constexpr std::int64_t kMostInt = std::numeric_limits<std::int32_t>::max();
constexpr std::int64_t kMost = std::numeric_limits<std::int64_t>::max();

// A share above 0 and at most 1.
void read_share(TableReader& table, const std::string& key, double* place) {
  const auto value = table.number(key);
  if (!value.has_value()) return;
  *place = *value;
  if (!(*value > 0 && *value <= 1)) {
    table.complain(key, absl::StrCat(key, " = ", *value, " is not above 0 and at most 1"),
                   absl::StrCat("write a share, or leave ", key, " out: the method's default"));
  }
}

}  // namespace

void read_study(TableReader& table, v1::StudySpec& spec) {
  if (const auto name = table.text("name")) spec.set_name(*name);
  table.require("name", "name = \"...\"");
  if (const auto code = table.text("code")) {
    v1::CodeUse& use = *spec.add_codes();
    use.set_role(v1::CODE_ROLE_FINE);
    use.set_code(*code);
  }
  table.require("code", "code = \"...\", with the name of a code that workers have");
  if (const auto count = table.integer("replicates", 1, kMostInt)) spec.set_replicates(static_cast<int>(*count));
  if (const auto priority = table.integer("priority", -kMostInt, kMostInt)) {
    spec.set_priority(static_cast<int>(*priority));
  }
  if (const auto tags = table.texts("tags")) spec.mutable_tags()->Assign(tags->begin(), tags->end());
  if (const auto late =
          table.word("late", {{"accept", v1::LATE_REPORTS_ACCEPT}, {"refuse", v1::LATE_REPORTS_REFUSE}})) {
    spec.set_late(static_cast<v1::LateReports>(*late));
  }
  table.finish();
}

void read_search(TableReader& table, v1::SearchSpec& search) {
  if (const auto method = table.text("method")) search.set_method(*method);
  if (const auto seed = table.integer("seed", 0, kMost)) search.set_seed(static_cast<std::uint64_t>(*seed));
  if (const auto order =
          table.word("order", {{"completion", v1::ORDER_COMPLETION}, {"candidate", v1::ORDER_CANDIDATE}})) {
    search.set_order(static_cast<v1::Order>(*order));
  }
  if (const auto count = table.integer("parallel", 1, kMostInt)) search.set_parallel(static_cast<int>(*count));
  if (const auto count = table.integer("look_ahead", 1, kMostInt)) {
    search.set_look_ahead(static_cast<int>(*count));
    const bool misspelt = table.has("order") && search.order() == v1::ORDER_UNSPECIFIED;
    if (search.order() != v1::ORDER_CANDIDATE && !misspelt) {
      table.complain("look_ahead", "look_ahead goes with order = \"candidate\" only",
                     "add order = \"candidate\", or leave look_ahead out");
    }
  }
  if (const auto count = table.integer("population", 1, kMostInt)) search.set_population(static_cast<int>(*count));
  double tolerance = 0, share = 0;
  read_share(table, "tolerance", &tolerance);
  read_share(table, "share", &share);
  search.set_tolerance(tolerance);
  search.set_share(share);
  table.finish();
}

void read_budget(TableReader& table, v1::Budget& budget) {
  if (const auto runs = table.integer("runs", 1, kMost)) budget.set_runs(*runs);
  if (const auto deadline = table.instant("deadline")) *budget.mutable_deadline() = *deadline;
  table.finish();
}

}  // namespace drover::studyfile
