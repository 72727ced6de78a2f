// A store that may not grow: SQLite answers as on a full disk.
#include <gtest/gtest.h>

#include "server/store/made_events.h"
#include "store/store.h"

namespace drover::store {
namespace {

TEST(FullDisk, RefusesWhatDoesNotFitAndKeepsWhatWasCommitted) {
  const TestFolder folder;
  std::int64_t kept = 0;
  {
    ASSERT_TRUE(store_with_study(folder.path()).ok());
    StoreOptions options = test_options();
    options.most_pages = 90;  // of 4 KiB; the empty schema has fewer
    auto store = Store::open(folder.path(), options);
    ASSERT_TRUE(store.ok()) << store.status();
    absl::Status full;
    for (std::int64_t n = 1; full.ok() && n < 10'000; ++n) {
      full = whole_run(**store, n, 1.0);
      if (full.ok()) kept = n;
    }
    EXPECT_TRUE(absl::IsResourceExhausted(full)) << full;
    EXPECT_GT(kept, 0);
    EXPECT_FALSE((*store)->in_transaction());
    EXPECT_FALSE((*store)->answer_of("x")->has_value()) << "reads go on";
  }
  auto store = Store::open(folder.path(), test_options());
  ASSERT_TRUE(store.ok()) << store.status();
  EXPECT_GE((*store)->study(1)->value().evaluated, kept);
  EXPECT_TRUE(append(**store, session_opened(2)).ok()) << "and writes, once there is space";
}

}  // namespace
}  // namespace drover::store
