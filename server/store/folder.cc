#include "store/folder.h"

#include <dirent.h>
#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <sys/vfs.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstring>
#include <set>
#include <string_view>

#include "absl/strings/escaping.h"
#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "store/chain.h"

namespace drover::store {
namespace {

constexpr std::size_t kMarkBytes = 16 + 1 + 64 + 1;  // event and hash in hexadecimal, a blank, a line end

absl::Status errno_status(const std::string& what) {
  const int error = errno;
  const std::string text = absl::StrCat(what, ": ", std::strerror(error));
  if (error == ENOSPC || error == EDQUOT) return absl::ResourceExhaustedError(text);
  return absl::FailedPreconditionError(text);
}

absl::StatusOr<std::set<std::string>> entries_of(const std::string& path) {
  DIR* const folder = opendir(path.c_str());
  if (folder == nullptr) return errno_status(absl::StrCat("data folder ", path));
  std::set<std::string> names;
  while (const dirent* const entry = readdir(folder)) {
    const std::string name = entry->d_name;
    if (name != "." && name != "..") names.insert(name);
  }
  closedir(folder);
  return names;
}

}  // namespace

std::string network_file_system(const std::string& path) {
  struct statfs info {};
  if (statfs(path.c_str(), &info) != 0) return "";
  // From the kernel's magic.h and the file systems' own sources.
  constexpr std::array<std::pair<std::uint32_t, const char*>, 9> kKinds = {{{0x6969, "NFS"},
                                                                            {0x517B, "SMB"},
                                                                            {0xFF534D42, "CIFS"},
                                                                            {0xFE534D42, "SMB2"},
                                                                            {0x0BD00BD0, "Lustre"},
                                                                            {0x47504653, "GPFS"},
                                                                            {0x19830326, "BeeGFS"},
                                                                            {0x00C36400, "Ceph"},
                                                                            {0x5346414F, "AFS"}}};
  for (const auto& [magic, name] : kKinds) {
    if (static_cast<std::uint32_t>(info.f_type) == magic) return name;
  }
  return "";
}

absl::StatusOr<std::unique_ptr<Folder>> Folder::open(const std::string& path, const Checks& checks) {
  if (mkdir(path.c_str(), 0700) != 0 && errno != EEXIST) return errno_status(absl::StrCat("data folder ", path));
  std::array<char, PATH_MAX> real{};
  if (realpath(path.c_str(), real.data()) == nullptr) return errno_status(absl::StrCat("data folder ", path));
  std::unique_ptr<Folder> folder(new Folder);
  folder->path_ = real.data();
  DROVER_TRY(folder->check(checks));
  DROVER_TRY(folder->lock());
  return folder;
}

absl::Status Folder::check(const Checks& checks) const {
  struct stat info {};
  if (stat(path_.c_str(), &info) != 0) return errno_status(absl::StrCat("data folder ", path_));
  const auto refuse = [this](const std::string& why) {
    return absl::FailedPreconditionError(absl::StrCat("data folder ", path_, " ", why));
  };
  if (!S_ISDIR(info.st_mode)) return refuse("is no folder");
  if (info.st_uid != geteuid()) return refuse("belongs to another user");
  if ((info.st_mode & (S_IWGRP | S_IWOTH)) != 0) {
    return refuse(absl::StrCat("can be written by others; close it with: chmod 700 ", path_));
  }
  DROVER_ASSIGN(const std::set<std::string> names, entries_of(path_));
  const bool ours = names.contains(kDatabaseFile) || names.contains(kLockFile);
  if (!names.empty() && !ours) {
    return refuse(absl::StrCat("holds other files (", *names.begin(), "...) and no store; name an empty folder"));
  }
  const std::string network = checks.probe(path_);
  if (!network.empty() && !checks.allow_network_file_system) {
    return refuse(absl::StrCat("lies on a network file system (", network,
                               "), where a database's locks and syncs cannot be trusted; use a local disk, or take the "
                               "risk with --allow-network-file-system"));
  }
  return absl::OkStatus();
}

absl::Status Folder::lock() {
  const std::string name = absl::StrCat(path_, "/", kLockFile);
  lock_ = ::open(name.c_str(), O_RDWR | O_CREAT | O_CLOEXEC | O_NOFOLLOW, 0600);
  if (lock_ < 0) return errno_status(name);
  if (flock(lock_, LOCK_EX | LOCK_NB) == 0) {
    const std::string pid = absl::StrCat(getpid(), "\n");
    if (ftruncate(lock_, 0) != 0 || pwrite(lock_, pid.data(), pid.size(), 0) < 0)
      return absl::OkStatus();  // for people
    return absl::OkStatus();
  }
  if (errno != EWOULDBLOCK) return errno_status(name);
  std::array<char, 32> text{};
  const ssize_t size = pread(lock_, text.data(), text.size() - 1, 0);
  std::string_view holder(text.data(), size > 0 ? static_cast<std::size_t>(size) : 0);
  holder = holder.substr(0, holder.find('\n'));
  return absl::AbortedError(absl::StrCat("data folder ", path_, " is in use by another coordinator",
                                         holder.empty() ? "" : absl::StrCat(" (process ", std::string(holder), ")"),
                                         "; end that one first, or name another folder"));
}

Folder::~Folder() {
  if (mark_ >= 0) close(mark_);
  if (lock_ >= 0) close(lock_);
}

absl::StatusOr<std::optional<Folder::HighWater>> Folder::high_water() const {
  const std::string name = absl::StrCat(path_, "/", kHighWaterFile);
  const int file = ::open(name.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW);
  if (file < 0 && errno == ENOENT) return std::nullopt;
  if (file < 0) return errno_status(name);
  std::array<char, kMarkBytes> bytes{};
  const ssize_t size = pread(file, bytes.data(), bytes.size(), 0);
  close(file);
  if (size == 0) return std::nullopt;
  const absl::string_view text(bytes.data(), bytes.size());
  std::uint64_t event = 0;
  // Written in one piece below a block's size: a torn one is a damaged disk, and says nothing.
  if (size != static_cast<ssize_t>(kMarkBytes) || !absl::SimpleHexAtoi(text.substr(0, 16), &event)) return std::nullopt;
  return HighWater{static_cast<std::int64_t>(event), absl::HexStringToBytes(text.substr(17, 64))};
}

absl::Status Folder::set_high_water(const HighWater& mark) {
  if (mark_ < 0) {
    const std::string name = absl::StrCat(path_, "/", kHighWaterFile);
    mark_ = ::open(name.c_str(), O_RDWR | O_CREAT | O_CLOEXEC | O_NOFOLLOW, 0600);
    if (mark_ < 0) return errno_status(name);
  }
  const std::string text = absl::StrCat(absl::Hex(mark.event, absl::kZeroPad16), " ", hex(mark.hash), "\n");
  if (pwrite(mark_, text.data(), text.size(), 0) != static_cast<ssize_t>(text.size()))
    return errno_status(kHighWaterFile);
  return absl::OkStatus();
}

}  // namespace drover::store
