#include <gtest/gtest.h>

#include "process/attempt_folder.h"

namespace drover::process {
namespace {

constexpr std::string_view kBegun =
    "format 1\nboot_id b\nrun 7\nfence 2\nrunner_pid 10\nrunner_start 100\nchild_pid 11\nchild_start 101\ntime_us "
    "5\nend \n";
constexpr std::string_view kEndedText =
    "format 1\ncause exited\nexit_code 0\nlaunch_errno 0\nkilled_by_us 0\nunkillable 0\nwall_us 1\nuser_us "
    "2\nsystem_us 3\n"
    "peak_memory_bytes 4\nend \n";

TEST(Records, AreReadWhole) {
  const auto begun = parse_begun(kBegun);
  ASSERT_TRUE(begun.ok());
  EXPECT_EQ(begun->child.pid, 11);
  EXPECT_EQ(begun->child.start, 101u);
  const auto ended = parse_ended(kEndedText);
  ASSERT_TRUE(ended.ok());
  EXPECT_EQ(ended->exit_code, 0);
  EXPECT_EQ(ended->peak_memory_bytes, 4);
}

TEST(Records, ThatWereCutAnywhereAreRefused) {
  for (std::size_t size = 0; size + 5 < kBegun.size(); ++size)
    EXPECT_FALSE(parse_begun(kBegun.substr(0, size)).ok()) << size;
  for (std::size_t size = 0; size + 5 < kEndedText.size(); ++size)
    EXPECT_FALSE(parse_ended(kEndedText.substr(0, size)).ok()) << size;
}

TEST(Records, OfALaterFormatAreRefused) {
  std::string later(kBegun);
  later.replace(later.find("format 1"), 8, "format 2");
  EXPECT_FALSE(parse_begun(later).ok());
}

TEST(Records, WithoutAnExitAreNoSuccess) {
  std::string text(kEndedText);
  text.replace(text.find("exit_code 0\n"), 12, "signal 9\n");
  const auto ended = parse_ended(text);
  ASSERT_TRUE(ended.ok());
  EXPECT_FALSE(ended->exit_code.has_value());
  EXPECT_EQ(ended->signal, 9);
}

}  // namespace
}  // namespace drover::process
