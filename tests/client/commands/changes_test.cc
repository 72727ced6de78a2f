// start, pause, resume and stop.
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
    "[[objective]]\nminimise = \"cost\"\n[budget]\nruns = 1200\n";

class Changes : public testing::Test {
 protected:
  void SetUp() override {
    fake_.studies.studies = {parsed<v1::Study>("name: 'penstock' state: STUDY_STATE_ACTIVE runs { begun: 2 }"),
                             parsed<v1::Study>("name: 'done' state: STUDY_STATE_FINISHED")};
    file_ = fake_.folder.write("penstock.toml", kFile);
    fake_.serve();
  }
  Answer ask(std::vector<std::string> arguments) { return drover(arguments, fake_.address()); }

  FakeCoordinator fake_;
  std::string file_;
};

TEST_F(Changes, StartSendsTheSpecAndSaysTheNextCommand) {
  const Answer answer = ask({"start", file_});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_EQ(answer.data, "");
  EXPECT_THAT(answer.messages, HasSubstr("study penstock started: up to 1,200 runs"));
  EXPECT_THAT(answer.messages, HasSubstr("drover show penstock"));
  ASSERT_EQ(fake_.studies.started().size(), 1u);
  EXPECT_EQ(fake_.studies.started()[0].objectives(0).name(), "cost");
  EXPECT_EQ(fake_.studies.request_ids()[0].size(), 32u);
}

TEST_F(Changes, StartIsRepeatedWithTheSameRequestId) {
  fake_.studies.failures_first = 3;
  const Answer answer = ask({"start", file_, "--json"});
  EXPECT_EQ(answer.exit, 0) << answer.messages;
  EXPECT_EQ(json::parse(answer.data)["owner"], "somebody");
  const auto ids = fake_.studies.request_ids();
  ASSERT_EQ(ids.size(), 4u);
  EXPECT_THAT(ids, testing::Each(ids[0]));
  EXPECT_EQ(fake_.studies.started().size(), 1u);
}

TEST_F(Changes, TwoCallsHaveDifferentRequestIds) {
  EXPECT_EQ(ask({"pause", "penstock"}).exit, 0);
  EXPECT_EQ(ask({"pause", "penstock"}).exit, 0);
  const auto ids = fake_.studies.request_ids();
  ASSERT_EQ(ids.size(), 2u);
  EXPECT_NE(ids[0], ids[1]);
}

TEST_F(Changes, ProblemsOfTheCoordinatorAreShownAtTheirPlaces) {
  fake_.studies.start_error = refused(absl::StatusCode::kInvalidArgument, "the study has problems", R"(
    reason: "INVALID_SPEC"
    problems { field: "objective[0].minimise" text: "there is no output \"cost\"" nearest: "costs" }
    problems { field: "study.code" text: "code \"surge\" is not known" advice: "known codes: \"a\"" }
    problems { field: "variable[0].unit" text: "a unit is wanted" })");
  const Answer answer = ask({"start", file_, "--json"});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_EQ(answer.messages, file_ + ":3:8: code \"surge\" is not known; known codes: \"a\"\n" + file_ +
                                 ":4:1: a unit is wanted\n" + file_ +
                                 ":9:12: there is no output \"cost\"; did you mean \"costs\"?\n");
  const json document = json::parse(answer.data);
  EXPECT_EQ(document["ok"], false);
  EXPECT_EQ(document["problems"][0]["line"], 3);
  EXPECT_EQ(document["problems"][2]["nearest"], "costs");
}

TEST_F(Changes, ATakenNameIsShownAtTheName) {
  fake_.studies.start_error = refused(absl::StatusCode::kAlreadyExists, "there is a study named penstock already");
  const Answer answer = ask({"start", file_});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_EQ(answer.messages, file_ +
                                 ":2:8: there is a study named penstock already; write another name, or see what "
                                 "there is: drover show penstock\n");
}

TEST_F(Changes, AWrongFileIsNotSent) {
  const std::string wrong = fake_.folder.write("wrong.toml", "[study]\nname = 1\n");
  const Answer answer = ask({"start", wrong});
  EXPECT_EQ(answer.exit, 2);
  EXPECT_THAT(answer.messages, HasSubstr(wrong + ":2:8: name in [study] is an integer"));
  EXPECT_TRUE(fake_.studies.request_ids().empty());
  EXPECT_EQ(ask({"start", fake_.folder.file("none.toml")}).exit, 2);
}

TEST_F(Changes, EachSaysWhatChangedAndTheNextCommand) {
  EXPECT_THAT(
      ask({"pause", "penstock"}).messages,
      testing::AllOf(HasSubstr("is paused"), HasSubstr("2 runs on workers"), HasSubstr("drover resume penstock")));
  EXPECT_THAT(ask({"resume", "penstock"}).messages, HasSubstr("drover show penstock"));
  EXPECT_THAT(ask({"stop", "penstock"}).messages, HasSubstr("is stopping"));
  EXPECT_EQ(json::parse(ask({"stop", "penstock", "--json"}).data)["state"], "stopping");
}

TEST_F(Changes, WhatTheStateDoesNotAllowIsANo) {
  const Answer answer = ask({"pause", "done"});
  EXPECT_EQ(answer.exit, 1);
  EXPECT_EQ(answer.messages, "drover: the study is finished\n");
}

}  // namespace
}  // namespace drover::commands
