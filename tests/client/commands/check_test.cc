#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <nlohmann/json.hpp>

#include "drover_call.h"
#include "fake_studies.h"

namespace drover::commands {
namespace {

using nlohmann::json;
using testing::HasSubstr;

const char kFile[] =
    "[study]\nname = \"penstock\"\ncode = \"surge\"\n[[variable]]\nname = \"x\"\nlow = 0\nhigh = 1\n"
    "[[objective]]\nminimise = \"cost\"\n[budget]\nruns = 400\n";

TEST(Check, SaysWhatTheBudgetBuys) {
  FakeCoordinator fake;
  fake.studies.check_answer.set_runs_per_candidate(3);
  fake.serve();
  const std::string file = fake.folder.write("s.toml", kFile);
  const Answer answer = drover({"check", file}, fake.address());
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_THAT(answer.data, HasSubstr("3 runs per candidate"));
  EXPECT_THAT(answer.data, HasSubstr("400 runs in the budget are 133 candidates"));
  const json document = json::parse(drover({"check", file, "--json"}, fake.address()).data);
  EXPECT_EQ(document["ok"], true);
  EXPECT_EQ(document["runs_per_candidate"], 3);
}

TEST(Check, ShowsProblemsAtTheirPlaces) {
  FakeCoordinator fake;
  v1::Problem& problem = *fake.studies.check_answer.add_problems();
  problem.set_field("variable[0].low");
  problem.set_text("low = 0 is not below high = 1");
  fake.serve();
  const std::string file = fake.folder.write("s.toml", kFile);
  const Answer answer = drover({"check", file}, fake.address());
  EXPECT_EQ(answer.exit, 2);
  EXPECT_EQ(answer.messages, file + ":6:7: low = 0 is not below high = 1\n");
}

TEST(Check, OfAFolderOfCodesNeedsTheOtherPrograms) {
  const TemporaryFolder folder;
  const std::string file = folder.write("s.toml", kFile);
  const Answer answer = drover({"check", file, "--codes", folder.path()});
  EXPECT_EQ(answer.exit, 1);
  EXPECT_THAT(answer.messages, HasSubstr("/nowhere/drover-coordinator is missing"));
}

}  // namespace
}  // namespace drover::commands
