#include <gtest/gtest.h>

#include <random>
#include <vector>

#include "dispatch/book.h"
#include "server/dispatch/made_book.h"

namespace drover::dispatch {
namespace {

const std::map<std::string, std::int32_t> kTwo = {{"surge", 2}};

TEST(Licences, OfAPoolThatIsNotConfiguredAreNotCounted) {
  Book book(Times{});
  book.add_study(study_of(1, 0, kTwo));
  book.add_session(worker(1, "w1"));
  book.add_run(run_of(1));
  EXPECT_EQ(book.pick(1, absl::ZeroDuration()), 1);
}

TEST(Licences, OfASilentHolderAreOverdueOnlyAfterItsOwnLimit) {
  Book book(Times{});
  book.set_licences({{"surge", 2}});
  book.add_study(study_of(1, 0, kTwo));
  book.add_session(worker(1, "w1"));
  book.add_run(run_of(1));
  ASSERT_TRUE(book.apply(granted(1, 1, 1, kTwo), absl::ZeroDuration()).ok());
  EXPECT_TRUE(book.overdue_licences(absl::Minutes(11)).empty()) << "it is heard from";
  book.mark_lapsed(1);
  EXPECT_TRUE(book.overdue_licences(absl::Minutes(10)).empty());
  EXPECT_EQ(book.overdue_licences(absl::Minutes(11)), (std::vector<Key>{{1, 1}}));
}

// Against a model of a few lines: what is held never exceeds the pool, and what the book says is held is what the model
// holds.
TEST(Licences, AreNeverHeldByMoreThanThereAre) {
  constexpr int kTokens = 5;
  std::mt19937 random(7);
  Book book(Times{});
  book.set_licences({{"surge", kTokens}});
  book.add_study(study_of(1, 0, kTwo));
  for (int w = 1; w <= 4; ++w) book.add_session(worker(w, "w" + std::to_string(w), 3));
  std::int64_t runs = 0;
  std::vector<Key> out;
  for (int step = 0; step < 10'000; ++step) {
    while (book.open_count(1) < 8) book.add_run(run_of(++runs));
    const auto session = static_cast<std::int64_t>(random() % 4 + 1);
    if (random() % 2 == 0 && book.free_slots(session) > 0) {
      if (const auto run = book.pick(session, absl::ZeroDuration())) {
        const Key key{*run, book.run(*run)->fence + 1};
        ASSERT_TRUE(book.apply(granted(key.run, key.fence, session, kTwo), absl::ZeroDuration()).ok());
        out.push_back(key);
      }
    } else if (!out.empty()) {
      const std::size_t which = random() % out.size();
      const Key key = out[which];
      out.erase(out.begin() + static_cast<std::ptrdiff_t>(which));
      const bool ends = random() % 2 == 0;
      ASSERT_TRUE(book.apply(ends ? settled(key.run, key.fence) : lost(key.run, key.fence, v1::LOSS_REASON_REBOOT),
                             absl::ZeroDuration()).ok());
    }
    ASSERT_EQ(book.held("surge"), static_cast<std::int32_t>(2 * out.size())) << "step " << step;
    ASSERT_LE(book.held("surge"), kTokens) << "step " << step;
  }
  EXPECT_GT(runs, 1000) << "the script really went on";
}

}  // namespace
}  // namespace drover::dispatch
