// Space-filling: points spread evenly over the space, for maps and first looks.
//
// Today's design first, then scrambled Sobol' points (search/sobol.h): from the first point on no part of the space is
// left out for long, whatever the budget turns out to be. It learns nothing from outcomes but which was the best, and
// never converges; a discrete space comes to its end when every point was asked for. State: O(points out);
// of discrete variables alone also a few bytes a point asked for.
#pragma once

#include <map>

#include "search/method.h"
#include "search/scatter.h"
#include "search/standing.h"
#include "search/visited.h"

namespace drover::search {

class SpaceFilling final : public SearchMethod {
 public:
  SpaceFilling(const Space& space, const Settings& settings);

  std::vector<Ask> next(int count, const History& history) override;
  absl::Status learn(const Outcome& outcome) override;
  absl::Status amend(const Space& space) override;
  Progress progress() const override;
  std::string save() const override;
  absl::Status load(std::string_view bytes, const History& history) override;
  int revision() const override { return 1; }

 private:
  struct Memory {
    std::int64_t asked = 0, learned = 0, scattered = 0;
    Standing best;  // kNowhere: none yet
    Point best_point;
    std::map<std::int64_t, Point> out;  // by ask; an empty point: an amended space no longer has it
    Visited visited;
  };
  std::string sentence() const;

  Space space_;
  Settings settings_;
  Scatter scatter_;
  Memory memory_;
};

}  // namespace drover::search
