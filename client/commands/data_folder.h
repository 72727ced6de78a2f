// The folder in which one solo run keeps everything, and the lock that keeps a second one out.
#pragma once

#include <memory>
#include <string>

#include "absl/status/statusor.h"

namespace drover::commands {

class DataFolder {
 public:
  // Makes the folder (mode 0700; its parent must exist) and locks it. FAILED_PRECONDITION, in words, when another
  // process works in it, or when it is no folder.
  static absl::StatusOr<std::unique_ptr<DataFolder>> open(const std::string& path);
  // A new one with a random name in the system's folder for temporary files, removed with all it holds by the
  // destructor.
  static absl::StatusOr<std::unique_ptr<DataFolder>> temporary();
  ~DataFolder();
  DataFolder(const DataFolder&) = delete;
  DataFolder& operator=(const DataFolder&) = delete;

  const std::string& path() const { return path_; }  // absolute
  std::string file(const std::string& name) const { return path_ + "/" + name; }

  // "unix:..." of a private socket: in this folder where its path is short enough for one, else in the folder of
  // link::default_address(), under a name that is a function of this folder's path.
  std::string socket_address() const;

 private:
  DataFolder(std::string path, int lock, bool passing) : path_(std::move(path)), lock_(lock), passing_(passing) {}

  std::string path_;
  int lock_;
  bool passing_;
};

}  // namespace drover::commands
