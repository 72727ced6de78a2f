#include "link/address.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <string>
#include <vector>

namespace drover::link {
namespace {

using ::testing::HasSubstr;

std::string own_folder() {
  std::string path = ::testing::TempDir() + "/address-XXXXXX";
  EXPECT_NE(mkdtemp(path.data()), nullptr);
  return path;
}

Address socket_at(const std::string& path) { return {.is_unix = true, .path = path}; }

TEST(Address, ReadsBothForms) {
  struct Row {
    std::string text, path, host;
    int port;
    bool local;
  };
  const std::vector<Row> rows = {
      {"unix:/run/drover/a.sock", "/run/drover/a.sock", "", 0, true},
      {"localhost:7777", "", "localhost", 7777, true},
      {"LocalHost:1", "", "LocalHost", 1, true},
      {"127.0.0.1:0", "", "127.0.0.1", 0, true},
      {"127.9.8.7:65535", "", "127.9.8.7", 65535, true},
      {"128.0.0.1:80", "", "128.0.0.1", 80, false},
      {"0.0.0.0:80", "", "0.0.0.0", 80, false},
      {"[::1]:7777", "", "::1", 7777, true},
      {"[::]:7777", "", "::", 7777, false},
      {"[fd00::2]:7777", "", "fd00::2", 7777, false},
      {"node-3.cluster_a.example:7777", "", "node-3.cluster_a.example", 7777, false},
      {"localhost.example:7777", "", "localhost.example", 7777, false},
      {"127.0.0.1.example:7777", "", "127.0.0.1.example", 7777, false},
  };
  for (const Row& row : rows) {
    const absl::StatusOr<Address> address = Address::parse(row.text);
    ASSERT_TRUE(address.ok()) << row.text << ": " << address.status();
    EXPECT_EQ(address->path, row.path) << row.text;
    EXPECT_EQ(address->host, row.host) << row.text;
    EXPECT_EQ(address->port, row.port) << row.text;
    EXPECT_EQ(address->is_local(), row.local) << row.text;
    EXPECT_EQ(address->text(), row.text);
  }
}

TEST(Address, RefusesWhatIsNeitherForm) {
  const std::vector<std::pair<std::string, std::string>> rows = {
      {"", "no port"},
      {"localhost", "no port"},
      {"localhost:", "port"},
      {"localhost:65536", "port"},
      {"localhost:-1", "port"},
      {"localhost:7x", "port"},
      {"localhost:+7", "port"},
      {"localhost: 7", "port"},
      {"localhost:000000080", "port"},
      {":7777", "no host"},
      {"::1:7777", "brackets"},
      {"[localhost]:7777", "IPv6"},
      {"[::1]", "IPv6"},
      {"a b:1", "host name"},
      {"a/b:1", "host name"},
      {std::string(254, 'a') + ":1", "host name"},
      {"unix:", "begin with /"},
      {"unix:relative/a.sock", "begin with /"},
      {"unix:7777", "begin with /"},
      {"unix:/run/drover/", "folder"},
      {std::string("unix:/a\0b", 9), "zero byte"},
  };
  for (const auto& [text, why] : rows) {
    const absl::Status status = Address::parse(text).status();
    EXPECT_EQ(status.code(), absl::StatusCode::kInvalidArgument) << text;
    EXPECT_THAT(std::string(status.message()), HasSubstr(why)) << text;
  }
}

TEST(Address, KnowsHowLongASocketsNameMayBe) {
  const std::string longest = "unix:/" + std::string(106, 'x');
  EXPECT_TRUE(Address::parse(longest).ok());
  const absl::Status status = Address::parse(longest + "x").status();
  EXPECT_EQ(status.code(), absl::StatusCode::kInvalidArgument);
  EXPECT_THAT(std::string(status.message()), HasSubstr("108 bytes"));
}

TEST(Address, ShowsNoControlCharactersOfAWrongOne) {
  const absl::Status status = Address::parse("\x1b[2Jhost:1").status();
  EXPECT_THAT(std::string(status.message()), HasSubstr("\\x1b[2Jhost"));
}

TEST(SocketFolder, IsMadeForItsOwnerAlone) {
  const std::string folder = own_folder() + "/new";
  ASSERT_TRUE(prepare_socket_folder(socket_at(folder + "/a.sock")).ok());
  struct stat info {};
  ASSERT_EQ(stat(folder.c_str(), &info), 0);
  EXPECT_EQ(info.st_mode & 0777u, 0700u);
  EXPECT_TRUE(prepare_socket_folder(socket_at(folder + "/a.sock")).ok()) << "a second time";
}

TEST(SocketFolder, RefusesWhatOthersCouldReach) {
  const std::string base = own_folder();
  std::filesystem::create_directory(base + "/open");
  chmod((base + "/open").c_str(), 0750);
  std::filesystem::create_directory(base + "/mine");
  chmod((base + "/mine").c_str(), 0700);
  std::filesystem::create_directory_symlink(base + "/mine", base + "/link");
  std::ofstream(base + "/file") << "x";
  const std::vector<std::pair<std::string, std::string>> rows = {
      {"/open/a.sock", "open to other users"}, {"/link/a.sock", "symbolic link"},
      {"/link//a.sock", "symbolic link"},      {"/file/a.sock", "no folder"},
      {"/none/none/a.sock", "cannot be made"},
  };
  for (const auto& [path, why] : rows) {
    const absl::Status status = prepare_socket_folder(socket_at(base + path));
    EXPECT_EQ(status.code(), absl::StatusCode::kFailedPrecondition) << path;
    EXPECT_THAT(std::string(status.message()), HasSubstr(why)) << path;
  }
}

TEST(SocketFolder, RefusesAnotherOwner) {
  // The root folder is nobody's but root's; for root itself it is open to others.
  EXPECT_EQ(prepare_socket_folder(socket_at("/a.sock")).code(), absl::StatusCode::kFailedPrecondition);
}

TEST(SocketFolder, ConcernsUnixSocketsOnly) {
  EXPECT_TRUE(prepare_socket_folder({.host = "localhost", .port = 1}).ok());
}

TEST(DefaultAddress, PrefersTheRuntimeFolder) {
  const char* const before = std::getenv("XDG_RUNTIME_DIR");
  const std::string kept = before == nullptr ? "" : before;
  setenv("XDG_RUNTIME_DIR", "/run/user/7", 1);
  EXPECT_EQ(default_address(), "unix:/run/user/7/drover/coordinator.sock");
  setenv("XDG_RUNTIME_DIR", "relative", 1);
  EXPECT_EQ(default_address(), "unix:/tmp/drover-" + std::to_string(getuid()) + "/coordinator.sock");
  unsetenv("XDG_RUNTIME_DIR");
  EXPECT_EQ(default_address(), "unix:/tmp/drover-" + std::to_string(getuid()) + "/coordinator.sock");
  if (before != nullptr) setenv("XDG_RUNTIME_DIR", kept.c_str(), 1);
  EXPECT_TRUE(Address::parse(default_address()).ok());
}

}  // namespace
}  // namespace drover::link
