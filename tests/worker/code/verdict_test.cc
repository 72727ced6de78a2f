#include "code/verdict.h"

#include <gtest/gtest.h>
#include <signal.h>

#include "worker/code/code_folder.h"

namespace drover::code {
namespace {

class Verdict : public testing::Test {
 protected:
  Verdict() : definition_(*read_definition(folder_.path())) {
    folder_.write("stdout", "said\n");
    folder_.write("stderr", "complained\n");
    how_.exit_code = 0;
  }
  v1::AttemptReport judged() {
    return judge(definition_, how_, folder_.path(), folder_.path() + "/stdout", folder_.path() + "/stderr");
  }
  v1::AttemptReport with_report(const std::string& text) {
    folder_.write("report.txt", text);
    return judged();
  }

  CodeFolder folder_;
  Definition definition_;
  HowItEnded how_;
};

TEST_F(Verdict, IsEvaluatedWhenTheOutputsCanBeRead) {
  const v1::AttemptReport report = with_report("HEIGHT = 2.5\n");
  EXPECT_EQ(report.ending(), v1::ENDING_EVALUATED);
  ASSERT_EQ(report.outputs_size(), 1);
  EXPECT_EQ(report.outputs(0).value(), 2.5);
  EXPECT_TRUE(report.stdout_tail().empty());
}

TEST_F(Verdict, IsFailedByATextThatMeansFailureThoughTheCodeSaysZero) {
  const v1::AttemptReport report = with_report("HEIGHT = 2.5\nFATAL: it bursts\n");
  EXPECT_EQ(report.ending(), v1::ENDING_FAILED);
  EXPECT_EQ(report.failure(), v1::FAILURE_KIND_CODE);
  EXPECT_EQ(report.reason(), "\"FATAL: it bursts\" (line 2 of report.txt)");
  EXPECT_EQ(report.stdout_tail(), "said\n");
  EXPECT_EQ(report.stderr_tail(), "complained\n");
}

TEST_F(Verdict, IsFailedWhenAnOutputIsMissingOrNoNumber) {
  EXPECT_EQ(judged().reason(), "output height: the code wrote no file report.txt");
  EXPECT_EQ(with_report("HEIGHT = NaN\n").reason(), "output height: it is NaN in report.txt");
  EXPECT_EQ(with_report("HEIGHT = inf\n").reason(), "output height: it is infinite in report.txt");
  EXPECT_EQ(with_report("HEIGHT = NaN\n").outputs_size(), 0);
}

TEST_F(Verdict, IsFailedByAnUnhealthyExitCode) {
  how_.exit_code = 3;
  const v1::AttemptReport report = with_report("HEIGHT = 2.5\n");
  EXPECT_EQ(report.ending(), v1::ENDING_FAILED);
  EXPECT_EQ(report.reason(), "the code ended with exit code 3");
  definition_.healthy_exit_codes = {0, 3};
  EXPECT_EQ(judged().ending(), v1::ENDING_EVALUATED);
}

TEST_F(Verdict, IsFailedByACrash) {
  how_.exit_code.reset();
  how_.signal = SIGSEGV;
  const v1::AttemptReport report = with_report("HEIGHT = 2.5\n");
  EXPECT_EQ(report.failure(), v1::FAILURE_KIND_SIGNAL);
  EXPECT_TRUE(report.abnormal());
}

TEST_F(Verdict, IsLostWhenSomebodyElseKilledIt) {
  how_.exit_code.reset();
  how_.signal = SIGKILL;
  const v1::AttemptReport report = with_report("HEIGHT = 2.5\n");
  EXPECT_EQ(report.ending(), v1::ENDING_LOST) << "no cliff is learned from it";
  EXPECT_EQ(report.loss(), v1::LOSS_REASON_KILLED_FROM_OUTSIDE);
  EXPECT_TRUE(report.abnormal());
}

TEST_F(Verdict, IsFailedForMemoryWhenItHadComeNearItsLimit) {
  how_.exit_code.reset();
  how_.signal = SIGKILL;
  definition_.memory_bytes = 1 << 30;
  how_.peak_memory_bytes = (1 << 30) - (1 << 20);
  EXPECT_EQ(judged().failure(), v1::FAILURE_KIND_MEMORY);
}

TEST_F(Verdict, IsFailedByItsTimeLimitAndStoppedWhenAsked) {
  how_.limit = true;
  how_.signal = SIGKILL;
  EXPECT_EQ(judged().failure(), v1::FAILURE_KIND_LIMIT);
  how_.stopped = true;
  EXPECT_EQ(judged().ending(), v1::ENDING_STOPPED);
}

TEST_F(Verdict, IsLostWhenItWasNotStartedOrNobodySawTheEnd) {
  how_.launch_failure = "no such program";
  EXPECT_EQ(judged().loss(), v1::LOSS_REASON_SITE);
  how_.seen = false;
  const v1::AttemptReport report = with_report("HEIGHT = 2.5\n");
  EXPECT_EQ(report.ending(), v1::ENDING_LOST) << "an end that nobody saw is never a success";
  EXPECT_EQ(report.loss(), v1::LOSS_REASON_EXIT_UNKNOWN);
}

TEST_F(Verdict, KeepsTailsWithinTheirLimit) {
  folder_.write("stdout", std::string(1 << 20, 'a') + "the end");
  how_.exit_code = 1;
  const v1::AttemptReport report = judged();
  EXPECT_EQ(report.stdout_tail().size(), std::size_t{64} << 10);
  EXPECT_TRUE(report.stdout_tail().ends_with("the end"));
}

}  // namespace
}  // namespace drover::code
