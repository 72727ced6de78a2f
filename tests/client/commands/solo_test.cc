// `drover solo` before any daemon runs, and with a coordinator that answers what it is told. The whole of it is tested
// with the real programs in tests/system.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <nlohmann/json.hpp>

#include "commands/data_folder.h"
#include "commands/study_paths.h"
#include "drover_call.h"
#include "fake_studies.h"
#include "temporary_folder.h"

namespace drover::commands {
namespace {

using testing::HasSubstr;

const char kFile[] =
    "[study]\nname = \"s\"\ncode = \"c\"\n[[variable]]\nname = \"x\"\nlow = 0\nhigh = 1\n[[objective]]\nminimise = "
    "\"y\"\n";

// Two programs that are there.
std::string programs_in(const TemporaryFolder& folder, const std::string& script) {
  for (const char* name : {"drover-coordinator", "drover-worker"}) {
    std::filesystem::permissions(folder.write(name, script), std::filesystem::perms::owner_all);
  }
  return folder.path();
}

const char kSpec[] =
    "spec { name: 's' codes { code: 'c' } variables { name: 'x' low: 0 high: 1 } objectives { name: 'y' } budget { "
    "runs: 9 } }";

const char kBest[] =
    "best { number: 2 verdict: CANDIDATE_VERDICT_FEASIBLE values { name: 'x' number: 0.25 } objectives { name: 'y' "
    "number: 3 } }";

// A coordinator of the test's own at the place where solo's would listen; the programs that solo starts do nothing.
class SoloWithAFake : public testing::Test {
 protected:
  void SetUp() override {
    std::filesystem::create_directory(folder_.file("codes"));
    std::filesystem::create_directories(folder_.file("s.drover/run"));
    file_ = folder_.write("s.toml", std::string(kFile) + "[budget]\nruns = 9\n");
    programs_in(programs_, "#!/bin/sh\nexec sleep 1000\n");
  }
  v1::Study study(const std::string& rest) { return parsed<v1::Study>(std::string("name: 's' ") + kSpec + rest); }
  Answer solo(std::vector<std::string> more = {}) {
    fake_.serve_at("unix:" + std::filesystem::canonical(folder_.path()).string() + "/s.drover/run/coordinator");
    more.insert(more.begin(), {"solo", file_});
    return drover(more, "", programs_.path());
  }

  TemporaryFolder folder_, programs_;
  std::string file_;
  FakeCoordinator fake_;
};

TEST_F(SoloWithAFake, StartsAStudyAndLeavesItsResults) {
  fake_.studies.once_started =
      study(std::string("state: STUDY_STATE_FINISHED sentence: 'the budget is spent' ") + kBest);
  fake_.studies.candidates = {
      parsed<v1::Candidate>("number: 1 verdict: CANDIDATE_VERDICT_FAILED values { number: 0.5 }"),
      fake_.studies.once_started->best()};
  const Answer answer = solo();
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_EQ(fake_.studies.started().size(), 1u);
  EXPECT_THAT(answer.messages, testing::StartsWith("starting a coordinator and a worker in "));
  EXPECT_THAT(answer.messages, HasSubstr("study s started"));
  EXPECT_THAT(answer.data, HasSubstr("study s is finished: the budget is spent\n"));
  EXPECT_THAT(answer.data, HasSubstr("best design: candidate 2 (feasible)\n"));
  EXPECT_EQ(read_file(folder_.file("s.drover/table.csv")),
            "candidate,x,verdict,y,violation\n1,0.5,failed,,\n2,0.25,feasible,3,0\n");
  EXPECT_EQ(nlohmann::json::parse(read_file(folder_.file("s.drover/best.json")))["best"]["number"], 2);
}

TEST_F(SoloWithAFake, ShowsAFinishedStudyAgainWithoutStartingIt) {
  fake_.studies.studies = {study(std::string("state: STUDY_STATE_FINISHED ") + kBest)};
  fake_.studies.candidates = {fake_.studies.studies[0].best()};
  const Answer answer = solo({"--json"});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_TRUE(fake_.studies.started().empty());
  const auto document = nlohmann::json::parse(answer.data);
  EXPECT_EQ(document["study"]["state"], "finished");
  EXPECT_EQ(document["best"]["values"][0]["value"], 0.25);
}

TEST_F(SoloWithAFake, ResumesAStudyThatFailed) {
  fake_.studies.studies = {
      study("state: STUDY_STATE_FAILED sentence: 'the disk was full' runs { evaluated: 4 failed: 1 }")};
  fake_.studies.resumed_to = v1::STUDY_STATE_FINISHED;
  const Answer answer = solo();
  EXPECT_EQ(answer.exit, 1) << "it has no feasible design";
  EXPECT_THAT(answer.messages, HasSubstr("study s was failed; it is resumed"));
  EXPECT_THAT(answer.data, HasSubstr("no feasible design was found"));
}

TEST_F(SoloWithAFake, RefusesAStudyFileThatHasChangedSince) {
  fake_.studies.studies = {study("state: STUDY_STATE_ACTIVE runs { evaluated: 4 failed: 1 }")};
  fake_.studies.studies[0].mutable_spec()->mutable_variables(0)->set_high(2);
  const Answer answer = solo();
  EXPECT_EQ(answer.exit, 2);
  EXPECT_THAT(answer.messages, HasSubstr(file_ + ":7:8: variable[0].high is 1; it was 2 when the study was started\n"));
  EXPECT_THAT(answer.messages, HasSubstr("with 5 of 9 runs done"));
}

TEST_F(SoloWithAFake, ShowsWhatTheCoordinatorFoundWrongWithTheFile) {
  fake_.studies.start_error = refused(absl::StatusCode::kInvalidArgument, "problems",
                                      "problems { field: 'study.code' text: 'code \"c\" is not known' }");
  const Answer answer = solo();
  EXPECT_EQ(answer.exit, 2);
  EXPECT_THAT(answer.messages, HasSubstr(file_ + ":3:8: code \"c\" is not known\n"));
}

TEST(Solo, KnowsWhereThingsLie) {
  EXPECT_EQ(data_folder_of("a/penstock.toml"), "a/penstock.drover");
  EXPECT_EQ(data_folder_of("penstock"), "penstock.drover");
  EXPECT_EQ(codes_folder_of("a/penstock.toml"), "a/codes");
  EXPECT_EQ(codes_folder_of("penstock.toml"), "codes");
  EXPECT_GE(usual_slots(), 1);
}

TEST(Solo, RefusesAWrongStudyFileBeforeItStartsAnything) {
  const TemporaryFolder folder;
  const Answer answer = drover({"solo", folder.write("s.toml", "[study]\n")});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_FALSE(std::filesystem::exists(folder.file("s.drover")));
}

TEST(Solo, SaysThatTheOtherProgramsAreMissing) {
  const TemporaryFolder folder;
  const Answer answer = drover({"solo", folder.write("s.toml", kFile)});
  EXPECT_NE(answer.exit, 0);
  EXPECT_THAT(answer.messages, HasSubstr("/nowhere/drover-coordinator is missing"));
}

TEST(Solo, SaysThatTheCodesAreMissing) {
  const TemporaryFolder folder, programs;
  const Answer answer = drover({"solo", folder.write("s.toml", kFile)}, "", programs_in(programs, "#!/bin/sh\n"));
  EXPECT_EQ(answer.exit, 2);
  EXPECT_THAT(answer.messages, HasSubstr("there is no folder " + folder.file("codes")));
}

TEST(Solo, KeepsOutOfAFolderThatIsInUse) {
  const TemporaryFolder folder;
  const auto held = DataFolder::open(folder.file("s.drover"));
  ASSERT_TRUE(held.ok());
  const Answer answer = drover({"solo", folder.write("s.toml", kFile)});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_THAT(answer.messages, HasSubstr("another drover solo"));
}

// Which of the two is given up first is open.
TEST(Solo, ShowsTheLogOfADaemonThatDoesNotRun) {
  const TemporaryFolder folder, programs;
  std::filesystem::create_directory(folder.file("codes"));
  const std::string script = "#!/bin/sh\necho \"$0 cannot\"\nexit 2\n";
  const Answer answer = drover({"solo", folder.write("s.toml", kFile)}, "", programs_in(programs, script));
  EXPECT_EQ(answer.exit, 1);
  EXPECT_THAT(answer.messages, HasSubstr("does not run: it ended with exit code 2, 3 times in a row; its log "));
  EXPECT_THAT(answer.messages, testing::ContainsRegex("drover-(coordinator|worker) cannot"));
}

}  // namespace
}  // namespace drover::commands
