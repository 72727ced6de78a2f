#include "link/duration.h"

#include <gtest/gtest.h>

#include <string>
#include <utility>
#include <vector>

namespace drover::link {
namespace {

TEST(ParseDuration, ReadsWhatPeopleWrite) {
  const std::vector<std::pair<std::string, absl::Duration>> rows = {
      {"90s", absl::Seconds(90)},
      {"2h", absl::Hours(2)},
      {"1h30m", absl::Minutes(90)},
      {"1.5d", absl::Hours(36)},
      {"250ms", absl::Milliseconds(250)},
      {"0s", absl::ZeroDuration()},
      {"0.1s", absl::Milliseconds(100)},
      {"1d2h3m4s5ms", absl::Hours(26) + absl::Minutes(3) + absl::Milliseconds(4005)},
      {"5m5ms", absl::Minutes(5) + absl::Milliseconds(5)},
  };
  for (const auto& [text, span] : rows) {
    const absl::StatusOr<absl::Duration> read = parse_duration(text);
    ASSERT_TRUE(read.ok()) << text;
    EXPECT_EQ(*read, span) << text;
  }
}

TEST(ParseDuration, RefusesTheRest) {
  for (const char* text : {"", "5", "s", "-5s", "+5s", "1e3s", "inf", "infs", "nans", "5 s", "1..5s", ".s", "5S",
                           "5min", "1h30", "5s ", " 5s", "99999999999999d", "5us"}) {
    EXPECT_EQ(parse_duration(text).status().code(), absl::StatusCode::kInvalidArgument) << '"' << text << '"';
  }
}

TEST(ProtoDuration, ComesBackAsItWent) {
  for (const absl::Duration span : {absl::ZeroDuration(), absl::Nanoseconds(1), absl::Milliseconds(-1500),
                                    absl::Seconds(1) - absl::Nanoseconds(1), absl::Hours(24 * 365 * 1000)}) {
    EXPECT_EQ(from_proto(to_proto(span)), span) << span;
  }
  EXPECT_EQ(to_proto(absl::Milliseconds(-1500)).seconds(), -1);
  EXPECT_EQ(to_proto(absl::Milliseconds(-1500)).nanos(), -500'000'000);
}

TEST(ProtoDuration, CutsEndlessOnesToWhatAMessageHolds) {
  // Range of the message: google/protobuf/duration.proto.
  EXPECT_EQ(to_proto(absl::InfiniteDuration()).seconds(), 315'576'000'000);
  EXPECT_EQ(to_proto(-absl::InfiniteDuration()).seconds(), -315'576'000'000);
}

TEST(HumanDuration, ShowsTwoUnitsAtMost) {
  const std::vector<std::pair<absl::Duration, std::string>> rows = {
      {absl::ZeroDuration(), "0 s"},
      {absl::Microseconds(400), "0.4 ms"},
      {absl::Milliseconds(41), "41 ms"},
      {absl::Milliseconds(3200), "3.2 s"},
      {absl::Milliseconds(999) + absl::Microseconds(700), "1 s"},
      {absl::Milliseconds(9960), "10 s"},
      {absl::Seconds(41), "41 s"},
      {absl::Milliseconds(59700), "1 min"},
      {absl::Seconds(61), "1 min 1 s"},
      {absl::Seconds(3599), "59 min 59 s"},
      {absl::Minutes(125), "2 h 5 min"},
      {absl::Hours(24) - absl::Seconds(10), "1 d"},
      {absl::Hours(148), "6 d 4 h"},
      {absl::Hours(24 * 400), "400 d"},
      {absl::Seconds(-90), "-1 min 30 s"},
      {absl::InfiniteDuration(), "endless"},
  };
  for (const auto& [span, text] : rows) EXPECT_EQ(human(span), text) << span;
}

}  // namespace
}  // namespace drover::link
