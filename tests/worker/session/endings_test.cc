#include "session/endings.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

namespace drover::session {
namespace {

TEST(Endings, CarryTheirReasonAsValidText) {
  const v1::AttemptReport report = lost(v1::LOSS_REASON_SITE, "caf\xE9");
  EXPECT_EQ(report.ending(), v1::ENDING_LOST);
  EXPECT_EQ(report.loss(), v1::LOSS_REASON_SITE);
  EXPECT_EQ(report.reason(), "caf\xEF\xBF\xBD");
  EXPECT_EQ(not_begun("x").ending(), v1::ENDING_NOT_BEGUN);
  EXPECT_EQ(stopped("x").ending(), v1::ENDING_STOPPED);
}

TEST(Fit, CutsTextsToWhatAReportMayHold) {
  v1::AttemptReport report;
  std::string reason(5000, 'r');
  reason.replace(4095, 2, "\xC3\xA9");  // would be cut in two
  report.set_reason(reason);
  report.set_stdout_tail(std::string(10, 'a') + std::string(64 << 10, 'b'));
  report.set_stderr_tail("short \xFF");
  fit(report);
  EXPECT_EQ(report.reason(), std::string(4095, 'r'));
  EXPECT_EQ(report.stdout_tail(), std::string(64 << 10, 'b')) << "the end is what tells";
  EXPECT_EQ(report.stderr_tail(), "short \xFF") << "bytes stay as they are";
}

TEST(HowItEnded, CarriesWhatTheRunnerSaw) {
  process::Survey found;
  found.begun.emplace().time = absl::FromUnixSeconds(5);
  process::Ended& ended = found.ended.emplace();
  ended.cause = process::Ended::Cause::kLimit;
  ended.signal = 9;
  ended.killed_by_us = true;
  ended.wall = absl::Seconds(3);
  ended.peak_memory_bytes = 77;
  const code::HowItEnded how = how_it_ended(found);
  EXPECT_TRUE(how.seen);
  EXPECT_TRUE(how.limit);
  EXPECT_FALSE(how.stopped);
  EXPECT_EQ(how.signal, 9);
  EXPECT_TRUE(how.killed_by_us);
  EXPECT_EQ(how.wall, absl::Seconds(3));
  EXPECT_EQ(how.peak_memory_bytes, 77);
  EXPECT_EQ(how.begun, absl::FromUnixSeconds(5));
  EXPECT_EQ(how.launch_failure, "");
}

TEST(HowItEnded, SaysWhyAProgramCouldNotBeStarted) {
  process::Survey found;
  found.ended.emplace().cause = process::Ended::Cause::kLaunchFailed;
  found.ended->launch_errno = 2;
  EXPECT_THAT(how_it_ended(found).launch_failure, ::testing::HasSubstr("No such file"));
}

}  // namespace
}  // namespace drover::session
