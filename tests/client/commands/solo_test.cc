// What `drover solo` says before any daemon runs. The whole of it is tested with the real programs in tests/system.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "commands/data_folder.h"
#include "commands/study_paths.h"
#include "drover_call.h"
#include "temporary_folder.h"

namespace drover::commands {
namespace {

using testing::HasSubstr;

const char kFile[] =
    "[study]\nname = \"s\"\ncode = \"c\"\n[[variable]]\nname = \"x\"\nlow = 0\nhigh = 1\n[[objective]]\nminimise = "
    "\"y\"\n";

// Two programs that do nothing, so that they are there.
std::string programs_in(const TemporaryFolder& folder, const std::string& script) {
  for (const char* name : {"drover-coordinator", "drover-worker"}) {
    std::filesystem::permissions(folder.write(name, script), std::filesystem::perms::owner_all);
  }
  return folder.path();
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
  EXPECT_THAT(answer.messages, HasSubstr("does not run: it ended with exit code 2, 2 times in a row; its log "));
  EXPECT_THAT(answer.messages, testing::ContainsRegex("drover-(coordinator|worker) cannot"));
}

}  // namespace
}  // namespace drover::commands
