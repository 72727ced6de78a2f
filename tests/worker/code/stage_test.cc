#include "code/stage.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <sstream>

#include "worker/code/code_folder.h"

namespace drover::code {
namespace {

std::vector<v1::NamedValue> inputs(double x, const std::string& kind) {
  std::vector<v1::NamedValue> made(2);
  made[0].set_name("kind");
  made[0].set_text(kind);
  made[1].set_name("x");
  made[1].set_number(x);
  return made;
}

std::string text_of(const std::string& path) {
  std::ostringstream text;
  text << std::ifstream(path).rdbuf();
  return text.str();
}

TEST(Stage, WritesInputsAndCopiesFiles) {
  const CodeFolder folder;
  const Definition definition = *read_definition(folder.path());
  const std::string work = folder.work();
  const auto staged = stage(definition, inputs(0.5, "flat"), work);
  ASSERT_TRUE(staged.ok()) << staged.status();
  EXPECT_EQ(text_of(work + "/deck.txt"), "X     5.000e-01\nKIND F\n");
  EXPECT_EQ(text_of(work + "/mesh.dat"), "1 2 3\n");
  EXPECT_EQ(staged->command.back(), "deck.txt");
  EXPECT_EQ(staged->command.front().front(), '/');
}

TEST(Stage, GivesAnEnvironmentOfItsOwn) {
  setenv("DROVER_TEST_SECRET", "canary", 1);
  const CodeFolder folder;
  folder.replace("version = \"1\"", "version = \"1\"\ninherit = [\"DROVER_TEST_WANTED\"]");
  setenv("DROVER_TEST_WANTED", "yes", 1);
  const std::string work = folder.work();
  const auto staged = stage(*read_definition(folder.path()), inputs(1, "flat"), work);
  ASSERT_TRUE(staged.ok());
  const std::vector<std::string> expected = {"DROVER_TEST_WANTED=yes", "HOME=" + work, "LC_ALL=C", "OMP_NUM_THREADS=1",
                                             "PATH=/usr/local/bin:/usr/bin:/bin", "SOLVER=fast", "TMPDIR=" + work};
  EXPECT_EQ(staged->environment, expected);
}

TEST(Stage, TakesExactlyWhatTheCodeAccepts) {
  const CodeFolder folder;
  const Definition definition = *read_definition(folder.path());
  auto wrong = inputs(1, "round");
  EXPECT_TRUE(absl::IsInvalidArgument(stage(definition, wrong, folder.work()).status())) << "no such choice";
  wrong = inputs(1, "flat");
  wrong.pop_back();
  EXPECT_TRUE(absl::IsInvalidArgument(stage(definition, wrong, folder.work()).status())) << "x is missing";
  wrong = inputs(1, "flat");
  wrong[1].set_name("y");
  EXPECT_TRUE(absl::IsInvalidArgument(stage(definition, wrong, folder.work()).status())) << "y is unknown";
  wrong = inputs(1, "flat");
  wrong[1].set_text("one");
  EXPECT_TRUE(absl::IsInvalidArgument(stage(definition, wrong, folder.work()).status())) << "x is a number";
}

TEST(Stage, FollowsNoLinkThatLiesInTheWay) {
  const CodeFolder folder;
  const std::string work = folder.work();
  std::filesystem::create_symlink(folder.path() + "/victim", work + "/deck.txt");
  EXPECT_FALSE(stage(*read_definition(folder.path()), inputs(1, "flat"), work).ok());
  EXPECT_FALSE(std::filesystem::exists(folder.path() + "/victim"));
}

}  // namespace
}  // namespace drover::code
