// [search] and [budget].
#include <algorithm>
#include <cmath>
#include <string>
#include <vector>

#include "absl/strings/str_cat.h"
#include "absl/time/time.h"
#include "search/methods.h"
#include "study/findings.h"
#include "study/limits.h"
#include "study/wording.h"

namespace drover::study {
namespace {

void check_method(Draft& draft) {
  const std::string& method = draft.given.search().method();
  if (method.empty()) {
    draft.effective.mutable_search()->set_method(std::string(search::kDefaultMethod));
    return;
  }
  const std::vector<std::string> known = search::method_names();
  if (std::find(known.begin(), known.end(), method) != known.end()) return;
  draft.findings.add("search.method", absl::StrCat("there is no search method ", quoted(method)),
                     {absl::StrCat("there are ", listed(known)), draft.findings.nearest_for(method, known)});
}

// 0 is always allowed: left open.
void check_count(Draft& draft, const std::string& key, int value, int least, int most) {
  if (value == 0 || (value >= least && value <= most)) return;
  draft.findings.add("search." + key, absl::StrCat(key, " = ", value, " is not between ", least, " and ", most));
}

void check_shares(Draft& draft) {
  const v1::SearchSpec& search = draft.given.search();
  if (search.tolerance() != 0.0 && !(search.tolerance() > 0.0 && search.tolerance() < 1.0)) {
    draft.findings.add("search.tolerance", absl::StrCat("tolerance = ", number_text(search.tolerance()),
                                                        " is not between 0 and 1: a share of the range is meant"));
  }
  if (search.share() != 0.0 && !(search.share() > 0.0 && search.share() <= 1.0)) {
    draft.findings.add("search.share", absl::StrCat("share = ", number_text(search.share()),
                                                    " is not above 0 and at most 1: a share of the swarm is meant"));
  }
}

void fill_search(Draft& draft) {
  v1::SearchSpec& search = *draft.effective.mutable_search();
  if (!search.has_seed()) search.set_seed(draft.context.fresh_seed);
  if (search.order() == v1::ORDER_UNSPECIFIED) search.set_order(v1::ORDER_COMPLETION);
  const bool by_candidate = search.order() == v1::ORDER_CANDIDATE;
  if (search.parallel() == 0) {
    const int slots = std::clamp(draft.context.slots, 1, kMostParallel);
    search.set_parallel(by_candidate ? kCandidateOrderParallel : slots);
  }
  if (by_candidate && search.look_ahead() == 0) search.set_look_ahead(kLookAheadPerParallel * search.parallel());
}

std::string time_text(absl::Time time) { return absl::FormatTime("%Y-%m-%dT%H:%M:%SZ", time, absl::UTCTimeZone()); }

void check_deadline(Draft& draft) {
  if (!draft.given.budget().has_deadline()) return;
  constexpr std::int64_t kYear10000 = 253'402'300'800;
  const auto& deadline = draft.given.budget().deadline();
  const bool sound = deadline.seconds() > 0 && deadline.seconds() < kYear10000 && deadline.nanos() >= 0 &&
                     deadline.nanos() < 1'000'000'000;
  if (!sound) {
    draft.findings.add("budget.deadline", "the deadline is no time between the years 1970 and 9999");
    return;
  }
  const absl::Time time = absl::FromUnixSeconds(deadline.seconds()) + absl::Nanoseconds(deadline.nanos());
  if (time > draft.context.now) return;
  draft.findings.add("budget.deadline", absl::StrCat("the deadline ", time_text(time), " has passed; it is ",
                                                     time_text(draft.context.now)));
}

}  // namespace

void check_search(Draft& draft) {
  const v1::SearchSpec& search = draft.given.search();
  check_method(draft);
  if (!v1::Order_IsValid(search.order())) {
    draft.findings.add("search.order", "no such order", {"use \"completion\" or \"candidate\"", ""});
  }
  check_count(draft, "parallel", search.parallel(), 1, kMostParallel);
  check_count(draft, "look_ahead", search.look_ahead(), 1, kMostLookAhead);
  check_count(draft, "population", search.population(), kLeastPopulation, kMostPopulation);
  if (search.look_ahead() != 0 && search.order() != v1::ORDER_CANDIDATE) {
    draft.findings.add("search.look_ahead", "look_ahead is used with order = \"candidate\" only");
  }
  check_shares(draft);
  fill_search(draft);
}

void check_budget(Draft& draft) {
  const std::int64_t runs = draft.given.budget().runs();
  const std::int64_t needed = draft.cells * draft.effective.replicates();
  if (runs < 0 || runs > kMostBudgetRuns) {
    draft.findings.add("budget.runs", absl::StrCat("runs = ", runs, " is not between 1 and ", kMostBudgetRuns));
  } else if (runs > 0 && runs < needed && draft.cells <= kMostCells) {
    draft.findings.add("budget.runs", absl::StrCat("runs = ", runs, " is not enough for one candidate, which needs ",
                                                   needed, ": ", draft.cells, " combinations of conditions x ",
                                                   draft.effective.replicates(), " replicates"));
  }
  check_deadline(draft);
}

}  // namespace drover::study
