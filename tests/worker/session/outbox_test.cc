#include "session/outbox.h"

#include <gtest/gtest.h>

#include <thread>

namespace drover::session {
namespace {

using Keys = std::vector<Key>;

TEST(Outbox, KeepsTheOrderInWhichReportsBecameReady) {
  Outbox outbox;
  for (const int run : {5, 3, 4}) outbox.add({run, 1});
  outbox.add({5, 1});
  EXPECT_EQ(outbox.size(), 3u);
  EXPECT_EQ(outbox.batch(2), (Keys{{5, 1}, {3, 1}}));
  EXPECT_EQ(outbox.batch(100), (Keys{{5, 1}, {3, 1}, {4, 1}})) << "taking a batch removes nothing";
  outbox.remove({3, 1});
  EXPECT_EQ(outbox.batch(100), (Keys{{5, 1}, {4, 1}}));
}

TEST(Outbox, SendsIsolatedReportsAloneAndLast) {
  Outbox outbox;
  for (const int run : {1, 2, 3}) outbox.add({run, 1});
  outbox.isolate({1, 1});
  outbox.isolate({2, 1});
  EXPECT_EQ(outbox.batch(100), (Keys{{3, 1}}));
  outbox.remove({3, 1});
  EXPECT_EQ(outbox.batch(100), (Keys{{1, 1}}));
  outbox.remove({1, 1});
  EXPECT_EQ(outbox.batch(100), (Keys{{2, 1}}));
}

TEST(Outbox, WakesWhoWaits) {
  Outbox outbox;
  std::thread adding([&] { outbox.add({1, 1}); });
  outbox.wait_for_any(absl::Hours(1));
  adding.join();
  EXPECT_FALSE(outbox.wait_until_empty(absl::Milliseconds(1)));
  std::thread removing([&] { outbox.remove({1, 1}); });
  EXPECT_TRUE(outbox.wait_until_empty(absl::Hours(1)));
  removing.join();
  outbox.close();
  outbox.wait_for_any(absl::Hours(1));  // comes back at once
}

}  // namespace
}  // namespace drover::session
