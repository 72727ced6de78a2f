#include "commands/csv.h"

#include <gtest/gtest.h>

#include "fake_studies.h"

namespace drover::commands {
namespace {

TEST(Csv, QuotesWhatNeedsIt) {
  const auto study = parsed<v1::Study>("spec { variables { name: 'a' } objectives { name: 'y' } }");
  const auto candidate = parsed<v1::Candidate>(
      "number: 1 values { name: 'a' text: 'say \"no\",\\nplease' } verdict: CANDIDATE_VERDICT_INFEASIBLE violation: "
      "0.5 "
      "objectives { name: 'y' number: 0.1 }");
  EXPECT_EQ(csv_line(study, candidate), "1,\"say \"\"no\"\",\nplease\",infeasible,0.1,0.5\n");
}

TEST(Csv, LeavesACandidateThatIsStillOutEmpty) {
  const auto study =
      parsed<v1::Study>("spec { variables { name: 'a' } objectives { name: 'y' } constraints { name: 'c' } }");
  const auto candidate = parsed<v1::Candidate>("number: 2 values { name: 'a' number: 0.3333333333333333 }");
  EXPECT_EQ(csv_head(study), "candidate,a,verdict,y,c,violation\n");
  EXPECT_EQ(csv_line(study, candidate), "2,0.3333333333333333,out,,,\n");
}

}  // namespace
}  // namespace drover::commands
