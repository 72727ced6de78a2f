#include "commands/data_folder.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <sys/stat.h>

#include "temporary_folder.h"

namespace drover::commands {
namespace {

TEST(DataFolder, IsMadeForItsOwnerAlone) {
  const TemporaryFolder parent;
  const auto folder = DataFolder::open(parent.file("a.drover"));
  ASSERT_TRUE(folder.ok()) << folder.status();
  struct stat info {};
  ASSERT_EQ(stat((*folder)->path().c_str(), &info), 0);
  EXPECT_EQ(info.st_mode & 0777, 0700u);
}

TEST(DataFolder, LetsOnlyOneIn) {
  const TemporaryFolder parent;
  {
    const auto first = DataFolder::open(parent.file("a.drover"));
    ASSERT_TRUE(first.ok());
    const auto second = DataFolder::open(parent.file("a.drover"));
    EXPECT_EQ(second.status().code(), absl::StatusCode::kFailedPrecondition);
    EXPECT_THAT(std::string(second.status().message()), testing::HasSubstr("another drover solo (process "));
  }
  EXPECT_TRUE(DataFolder::open(parent.file("a.drover")).ok());
}

TEST(DataFolder, RefusesWhatIsNoFolder) {
  const TemporaryFolder parent;
  EXPECT_FALSE(DataFolder::open(parent.write("file", "x")).ok());
  EXPECT_FALSE(DataFolder::open(parent.file("no/such/parent")).ok());
}

TEST(DataFolder, HasASocketWithAShortPath) {
  const TemporaryFolder parent;
  const auto near = DataFolder::open(parent.file("a.drover"));
  ASSERT_TRUE(near.ok());
  EXPECT_EQ((*near)->socket_address(), "unix:" + (*near)->path() + "/run/coordinator");
  const auto far = DataFolder::open(parent.file(std::string(120, 'x')));
  ASSERT_TRUE(far.ok());
  EXPECT_LE((*far)->socket_address().size(), 107 + sizeof "unix:" - 1);
  EXPECT_THAT((*far)->socket_address(), testing::HasSubstr("/solo-"));
}

TEST(DataFolder, ATemporaryOneGoesWithAllItHolds) {
  std::string path;
  {
    const auto folder = DataFolder::temporary();
    ASSERT_TRUE(folder.ok()) << folder.status();
    path = (*folder)->path();
    std::ofstream((*folder)->file("x")) << "y";
  }
  EXPECT_FALSE(std::filesystem::exists(path));
}

}  // namespace
}  // namespace drover::commands
