#include "store/folder.h"

#include <gtest/gtest.h>
#include <sys/stat.h>

#include <filesystem>
#include <fstream>

#include "server/store/made_events.h"

namespace drover::store {
namespace {

TEST(Folder, IsMadeForItsOwnerAlone) {
  const TestFolder test;
  const auto folder = Folder::open(test.path() + "/data", {});
  ASSERT_TRUE(folder.ok()) << folder.status();
  struct stat info {};
  ASSERT_EQ(stat((test.path() + "/data").c_str(), &info), 0);
  EXPECT_EQ(info.st_mode & 0777, 0700u);
}

TEST(Folder, IsHeldByOneAlsoUnderAnotherName) {
  const TestFolder test;
  const auto first = Folder::open(test.path() + "/data", {});
  ASSERT_TRUE(first.ok());
  std::filesystem::create_symlink(test.path() + "/data", test.path() + "/alias");
  EXPECT_TRUE(absl::IsAborted(Folder::open(test.path() + "/data", {}).status()));
  EXPECT_TRUE(absl::IsAborted(Folder::open(test.path() + "/alias", {}).status()));
}

TEST(Folder, IsFreeAgainWhenItsHolderHasGone) {
  const TestFolder test;
  ASSERT_TRUE(Folder::open(test.path() + "/data", {}).ok());
  EXPECT_TRUE(Folder::open(test.path() + "/data", {}).ok());
}

TEST(Folder, IsRefusedWhenOthersCanWriteInIt) {
  const TestFolder test;
  std::filesystem::permissions(test.path(), std::filesystem::perms::all);
  const absl::Status refused = Folder::open(test.path(), {}).status();
  EXPECT_TRUE(absl::IsFailedPrecondition(refused));
  EXPECT_NE(refused.message().find("chmod 700"), absl::string_view::npos);
}

TEST(Folder, IsRefusedOnANetworkFileSystemUnlessTheRiskIsTaken) {
  const TestFolder test;
  Folder::Checks checks{.probe = [](const std::string&) { return "NFS"; }};
  const absl::Status refused = Folder::open(test.path() + "/data", checks).status();
  EXPECT_TRUE(absl::IsFailedPrecondition(refused));
  EXPECT_NE(refused.message().find("NFS"), absl::string_view::npos);
  checks.allow_network_file_system = true;
  EXPECT_TRUE(Folder::open(test.path() + "/data", checks).ok());
}

TEST(Folder, RemembersTheHighWaterMark) {
  const TestFolder test;
  {
    const auto folder = Folder::open(test.path(), {});
    ASSERT_TRUE(folder.ok());
    EXPECT_FALSE((*folder)->high_water()->has_value());
    ASSERT_TRUE((*folder)->set_high_water({7, std::string(32, '\x9a')}).ok());
    ASSERT_TRUE((*folder)->set_high_water({123456789012, std::string(32, '\x01')}).ok());
  }
  const auto folder = Folder::open(test.path(), {});
  ASSERT_TRUE(folder.ok());
  const auto mark = (*folder)->high_water();
  ASSERT_TRUE(mark.ok() && mark->has_value());
  EXPECT_EQ((*mark)->event, 123456789012);
  EXPECT_EQ((*mark)->hash, std::string(32, '\x01'));
}

}  // namespace
}  // namespace drover::store
