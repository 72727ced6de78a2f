// The data folder: ours alone, on a disk of this machine, used by one coordinator.
#pragma once

#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <string>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover::store {

// What kind of network file system a path lies on; empty: none that is known.
std::string network_file_system(const std::string& path);

// Names of the files in a data folder.
inline constexpr char kDatabaseFile[] = "store.sqlite";
inline constexpr char kLockFile[] = "drover.lock";
inline constexpr char kHighWaterFile[] = "high-water";

// Holds the folder's lock as long as it lives. The lock file is never closed while the database is open.
class Folder {
 public:
  struct Checks {
    bool allow_network_file_system = false;
    std::function<std::string(const std::string&)> probe = network_file_system;
  };
  // Makes the folder (mode 0700) where there is none. FAILED_PRECONDITION, in words: not a folder, somebody else's,
  // open to others for writing, files of something else in it, on a network file system. ABORTED: another coordinator
  // uses it.
  static absl::StatusOr<std::unique_ptr<Folder>> open(const std::string& path, const Checks& checks);
  ~Folder();
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;

  const std::string& path() const { return path_; }
  std::string database() const { return path_ + "/" + kDatabaseFile; }

  // The last event that was committed, written in place after each commit without a sync of its own: a power cut can
  // leave it too old and never too new, so that a store behind it has lost something for sure.
  struct HighWater {
    std::int64_t event = 0;
    std::string hash;  // 32 bytes
  };
  absl::StatusOr<std::optional<HighWater>> high_water() const;  // none: no such file yet
  absl::Status set_high_water(const HighWater& mark);

 private:
  Folder() = default;
  absl::Status check(const Checks& checks) const;
  absl::Status lock();
  std::string path_;
  int lock_ = -1;
  int mark_ = -1;
};

}  // namespace drover::store
