// list, show, best, runs and table.
#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <unistd.h>

#include <algorithm>
#include <csignal>
#include <nlohmann/json.hpp>

#include "drover_call.h"
#include "fake_studies.h"

namespace drover::commands {
namespace {

using nlohmann::json;
using testing::HasSubstr;

const char kStudy[] = R"(
  name: "penstock" owner: "ada" state: STUDY_STATE_ACTIVE sentence: "searching" revision: 9
  spec {
    name: "penstock"
    variables { name: "diameter" unit: "m" low: 0.3 high: 0.9 baseline: 0.5 }
    variables { name: "steel" kind: VARIABLE_KIND_CHOICE choices: "S235" choices: "S,355" baseline_choice: "S235" }
    objectives { name: "benefit" sense: SENSE_MAXIMISE unit: "kEUR/a" }
    constraints { name: "pressure" unit: "MPa" at_most: 3.8 allowance: 0.05 }
    budget { runs: 400 }
  }
  runs { begun: 2 waiting: 1 evaluated: 100 failed: 20 } candidates: 43 learned: 40 attempts_lost: 3
  workers_busy: 1 slots: 4 mean_run_time { seconds: 7 }
  best { number: 2 verdict: CANDIDATE_VERDICT_FEASIBLE
    values { name: "diameter" number: 0.42 unit: "m" } values { name: "steel" text: "S,355" }
    objectives { name: "benefit" number: 348.5 unit: "kEUR/a" }
    constraints { name: "pressure" number: 3.5 unit: "MPa" } })";

const char kFirst[] = R"(
  number: 1 verdict: CANDIDATE_VERDICT_FEASIBLE origin: ORIGIN_SEARCH
  values { name: "diameter" number: 0.5 unit: "m" } values { name: "steel" text: "S235" }
  objectives { name: "benefit" number: 340 unit: "kEUR/a" } constraints { name: "pressure" number: 3.1 unit: "MPa" })";

const char kFailed[] = R"(
  number: 3 verdict: CANDIDATE_VERDICT_FAILED reason: "the pipe burst"
  values { name: "diameter" number: 0.1 unit: "m" } values { name: "steel" text: "S235" })";

const char kRun[] = R"(
  number: 5 candidate: 2 condition: 1 replicate: 0 state: RUN_STATE_SETTLED ending: ENDING_FAILED
  failure: FAILURE_KIND_LIMIT reason: "2 m were not enough" worker: "node7" attempts: 2 wall { seconds: 120 }
  stdout_tail: "caf\303\251 \377" id: 77)";

class Questions : public testing::Test {
 protected:
  void SetUp() override {
    fake_.studies.studies = {parsed<v1::Study>("name: 'anchor' state: STUDY_STATE_FINISHED"),
                             parsed<v1::Study>(kStudy)};
    fake_.studies.candidates = {parsed<v1::Candidate>(kFirst), fake_.studies.studies[1].best(),
                                parsed<v1::Candidate>(kFailed)};
    fake_.studies.runs = {parsed<v1::Run>(kRun), parsed<v1::Run>("number: 6 candidate: 2 state: RUN_STATE_SET_ASIDE")};
    fake_.serve();
  }
  Answer ask(std::vector<std::string> arguments) { return drover(arguments, fake_.address()); }

  FakeCoordinator fake_;
};

TEST_F(Questions, ListShowsEveryPage) {
  const Answer answer = ask({"list"});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_EQ(answer.data,
            "study     state        runs  owner  what it does\n"
            "anchor    finished        0\n"
            "penstock  active    120/400  ada    searching\n");
  const Answer lines = ask({"list", "--json"});
  EXPECT_EQ(std::count(lines.data.begin(), lines.data.end(), '\n'), 2);
  EXPECT_EQ(json::parse(lines.data.substr(0, lines.data.find('\n')))["name"], "anchor");
}

TEST_F(Questions, ShowTellsInPlainWords) {
  const Answer answer = ask({"show", "penstock"});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  for (const char* text : {"penstock: active\nsearching\n", "100 evaluated, 20 failed, 2 running, 1 waiting",
                           "120 of 400 runs used", "1 busy with it, 4 slots in all", "3 (their runs wait again)",
                           "best so far: candidate 2 (feasible)", "at most 3.8 MPa, 5 % kept back", "about 8 min"}) {
    EXPECT_THAT(answer.data, HasSubstr(text));
  }
  EXPECT_EQ(answer.data.find('\x1b'), std::string::npos);
}

TEST_F(Questions, ShowAsJsonKeepsItsPromise) {
  const json study = json::parse(ask({"show", "penstock", "--json"}).data);
  EXPECT_EQ(study["state"], "active");
  EXPECT_EQ(study["runs"]["evaluated"], 100);
  EXPECT_EQ(study["budget_runs"], 400);
  EXPECT_EQ(study["mean_run_time_s"], 7.0);
  EXPECT_EQ(study["best"]["values"][1]["value"], "S,355");
  EXPECT_EQ(study["best"]["objectives"][0]["unit"], "kEUR/a");
}

TEST_F(Questions, AnUnknownStudyIsWrongInputAndTheNearestIsNamed) {
  const Answer answer = ask({"show", "pentsock", "--json"});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_EQ(answer.messages, "drover: no study named pentsock; the nearest is penstock\n");
  EXPECT_EQ(json::parse(answer.data)["error"]["code"], "NOT_FOUND");
  EXPECT_EQ(json::parse(answer.data)["error"]["reason"], "NO_SUCH_STUDY");
}

TEST_F(Questions, BestComparesWithTodaysDesign) {
  const Answer answer = ask({"best", "penstock"});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_EQ(answer.data,
            "candidate 2 (feasible)\n"
            "  name       best  today  unit\n"
            "  diameter   0.42    0.5  m\n"
            "  steel     S,355   S235\n"
            "  benefit   348.5    340  kEUR/a  maximised: +8.5 kEUR/a (+2.5 %), better\n"
            "  pressure    3.5    3.1  MPa     at most 3.8 MPa, 5 % kept back\n");
  EXPECT_EQ(json::parse(ask({"best", "penstock", "--json"}).data)["best"]["number"], 2);
}

TEST_F(Questions, NoBestYetIsANo) {
  const Answer answer = ask({"best", "anchor", "--json"});
  EXPECT_EQ(answer.exit, 1);
  EXPECT_TRUE(json::parse(answer.data)["best"].is_null());
}

TEST_F(Questions, RunsShowsHowEachEnded) {
  const Answer answer = ask({"runs", "penstock"});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_THAT(answer.data, HasSubstr("failed (limit): 2 m were not enough"));
  EXPECT_THAT(answer.data, HasSubstr("set aside"));
  const std::string lines = ask({"runs", "penstock", "--json"}).data;
  const json run = json::parse(lines.substr(0, lines.find('\n')));
  EXPECT_EQ(run["state"], "settled");
  EXPECT_EQ(run["failure"], "limit");
  EXPECT_EQ(run["wall_s"], 120.0);
  EXPECT_EQ(run["stdout_tail"], "caf\xC3\xA9 \xEF\xBF\xBD");
}

TEST_F(Questions, TableHasARowForEveryCandidate) {
  const std::string wanted =
      "candidate,diameter [m],steel,verdict,benefit [kEUR/a],pressure [MPa],violation\n"
      "1,0.5,S235,feasible,340,3.1,0\n"
      "2,0.42,\"S,355\",feasible,348.5,3.5,0\n"
      "3,0.1,S235,failed,,,\n";
  EXPECT_EQ(ask({"table", "penstock"}).data, wanted);
  const Answer answer = ask({"table", "penstock", "-o", fake_.folder.file("t.csv")});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_EQ(answer.data, "");
  EXPECT_EQ(read_file(fake_.folder.file("t.csv")), wanted);
  EXPECT_EQ(ask({"table", "penstock", "-o", fake_.folder.file("no/such/folder.csv")}).exit, 2);
}

TEST_F(Questions, NobodyAnsweringEndsWithThree) {
  fake_.stop();
  const Answer answer = ask({"list"});
  EXPECT_EQ(answer.exit, 3);
  EXPECT_THAT(answer.messages, HasSubstr("no coordinator answers at " + fake_.address()));
}

TEST_F(Questions, AReaderThatWentAwayIsNoError) {
  std::signal(SIGPIPE, SIG_IGN);
  int ends[2];
  ASSERT_EQ(pipe(ends), 0);
  close(ends[0]);
  std::FILE* const gone = fdopen(ends[1], "w");
  Memory messages;
  const link::RealClock clock;
  Interruption interruption;
  const Surroundings surroundings{.data = gone,
                                  .messages = messages.stream(),
                                  .clock = clock,
                                  .interruption = interruption,
                                  .version = "",
                                  .programs = "",
                                  .coordinator = fake_.address(),
                                  .user = ""};
  EXPECT_EQ(run({"table", "penstock"}, surroundings), 0);
  EXPECT_EQ(run({"list", "--json"}, surroundings), 0);
  EXPECT_EQ(messages.text(), "");
  std::fclose(gone);
}

TEST_F(Questions, AFullDiskIsAnError) {
  std::FILE* const full = std::fopen("/dev/full", "w");
  if (full == nullptr) GTEST_SKIP() << "this system has no /dev/full";
  Memory messages;
  const link::RealClock clock;
  Interruption interruption;
  const Surroundings surroundings{.data = full,
                                  .messages = messages.stream(),
                                  .clock = clock,
                                  .interruption = interruption,
                                  .version = "",
                                  .programs = "",
                                  .coordinator = fake_.address(),
                                  .user = ""};
  EXPECT_EQ(run({"table", "penstock"}, surroundings), 1);
  EXPECT_THAT(messages.text(), HasSubstr("cannot be written"));
  std::fclose(full);
}

}  // namespace
}  // namespace drover::commands
