#include "process/files.h"

#include <gtest/gtest.h>

#include <filesystem>

#include "process/tails.h"
#include "worker/process/attempt.h"

namespace drover::process {
namespace {

TEST(Files, ReplaceAFileWholeOrNotAtAll) {
  const TestAttempt folder;
  RealFiles files;
  const std::string path = folder.folder() + "/note";
  ASSERT_TRUE(files.write_durably(path, "old").ok());
  ASSERT_TRUE(files.write_durably(path, std::string("ne\0w", 4)).ok());
  EXPECT_EQ(*files.read(path), std::string("ne\0w", 4));
  std::filesystem::create_directory(path + ".new");  // where the temporary file would be
  EXPECT_FALSE(files.write_durably(path, "newer").ok());
  EXPECT_EQ(*files.read(path), std::string("ne\0w", 4));
}

TEST(Files, SayWhatIsNotThere) {
  const TestAttempt folder;
  RealFiles files;
  EXPECT_TRUE(absl::IsNotFound(files.read(folder.folder() + "/none").status()));
  EXPECT_TRUE(absl::IsNotFound(files.list(folder.folder() + "/none").status()));
  EXPECT_TRUE(absl::IsNotFound(files.write_durably(folder.folder() + "/none/file", "x")));
  EXPECT_TRUE(files.remove_tree(folder.folder() + "/none").ok());
}

TEST(Files, ListNamesInOrder) {
  const TestAttempt folder;
  RealFiles files;
  for (const char* const name : {"b", "a", "c"})
    ASSERT_TRUE(files.make_folder(folder.work() + "/" + name + "/deep").ok());
  EXPECT_EQ(*files.list(folder.work()), (std::vector<std::string>{"a", "b", "c"}));
}

TEST(Files, RemoveATreeAndNothingThatItsLinksPointTo) {
  const TestAttempt folder;
  RealFiles files;
  ASSERT_TRUE(files.write_durably(folder.folder() + "/victim", "kept").ok());
  ASSERT_TRUE(files.make_folder(folder.work() + "/tree/locked").ok());
  ASSERT_TRUE(files.write_durably(folder.work() + "/tree/locked/file", "x").ok());
  std::filesystem::create_symlink(folder.folder(), folder.work() + "/tree/link");
  std::filesystem::permissions(folder.work() + "/tree/locked", std::filesystem::perms::none);
  EXPECT_TRUE(files.remove_tree(folder.work() + "/tree").ok());
  EXPECT_FALSE(files.exists(folder.work() + "/tree"));
  EXPECT_EQ(*files.read(folder.folder() + "/victim"), "kept");
}

TEST(Files, GiveTheTailOfALargeOne) {
  const TestAttempt folder;
  RealFiles files;
  ASSERT_TRUE(files.write_durably(folder.folder() + "/log", std::string(100'000, 'a') + "end").ok());
  EXPECT_EQ(read_tail(folder.folder() + "/log", 5), "aaend");
  EXPECT_EQ(read_tail(folder.folder() + "/log", 1 << 20).size(), 100'003u);
  EXPECT_EQ(read_tail(folder.folder() + "/none", 5), "");
}

}  // namespace
}  // namespace drover::process
