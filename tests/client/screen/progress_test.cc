#include "screen/progress.h"

#include <gtest/gtest.h>

#include "google/protobuf/text_format.h"

namespace drover::screen {
namespace {

v1::Study study_of(const std::string& text) {
  v1::Study study;
  EXPECT_TRUE(google::protobuf::TextFormat::ParseFromString(text, &study));
  return study;
}

const absl::Time kNow = absl::FromUnixSeconds(1'800'000'000);

TEST(Progress, SaysHowFarAStudyIs) {
  const v1::Study study = study_of(R"(
    state: STUDY_STATE_ACTIVE spec { budget { runs: 400 } } slots: 4 mean_run_time { seconds: 2 }
    runs { waiting: 1 granted: 1 begun: 2 evaluated: 120 failed: 3 }
    best { number: 7 objectives { name: "gain" number: 45.67 unit: "kEUR/a" } })");
  EXPECT_EQ(progress_line(study, kNow), "runs 123/400  best 45.67 kEUR/a (feasible)  slots 3/4 busy  about 2 min left");
}

TEST(Progress, SaysWhatIsNotThereYet) {
  const v1::Study study = study_of("state: STUDY_STATE_PAUSED runs { parked: 2 set_aside: 1 }");
  EXPECT_EQ(progress_line(study, kNow), "runs 0  no feasible design yet  no worker  2 parked  1 set aside  paused");
}

TEST(TimeLeft, CountsTheRunsThatAreOutOnceNoMoreAreAsked) {
  v1::Study study = study_of(R"(
    state: STUDY_STATE_FINISHING spec { budget { runs: 400 } } slots: 2 mean_run_time { seconds: 10 }
    runs { begun: 2 waiting: 1 evaluated: 50 })");
  EXPECT_EQ(time_left(study, kNow), absl::Seconds(20));
  study.set_state(v1::STUDY_STATE_ACTIVE);
  EXPECT_EQ(time_left(study, kNow), absl::Seconds(1750));
}

TEST(TimeLeft, EndsAtTheDeadline) {
  v1::Study study = study_of(R"(
    state: STUDY_STATE_ACTIVE spec { budget { runs: 400 deadline { seconds: 1800000060 } } } slots: 1
    mean_run_time { seconds: 10 })");
  EXPECT_EQ(time_left(study, kNow), absl::Seconds(60));
  EXPECT_EQ(time_left(study, kNow + absl::Hours(1)), absl::ZeroDuration());
}

TEST(TimeLeft, IsNotInventedWhereItCannotBeKnown) {
  EXPECT_EQ(time_left(study_of("state: STUDY_STATE_ACTIVE slots: 3 mean_run_time { seconds: 1 }"), kNow), std::nullopt);
  EXPECT_EQ(time_left(study_of("state: STUDY_STATE_ACTIVE spec { budget { runs: 9 } } slots: 3"), kNow), std::nullopt);
  EXPECT_EQ(
      time_left(study_of("state: STUDY_STATE_ACTIVE spec { budget { runs: 9 } } mean_run_time { seconds: 1 }"), kNow),
      std::nullopt);
  EXPECT_EQ(time_left(study_of("state: STUDY_STATE_FINISHED slots: 3 mean_run_time { seconds: 1 }"), kNow),
            std::nullopt);
}

}  // namespace
}  // namespace drover::screen
