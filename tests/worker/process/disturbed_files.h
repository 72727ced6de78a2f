// A real disk on which a test lets things happen at a chosen moment.
#pragma once

#include <functional>
#include <string>
#include <utility>
#include <vector>

#include "process/files.h"

namespace drover::process {

class DisturbedFiles final : public Files {
 public:
  std::function<void(const std::string& path)> after_read = [](const std::string&) {};
  absl::Status write_status;  // of every write that follows; nothing is written unless it is OK

  absl::Status write_durably(const std::string& path, std::string_view bytes) override {
    return write_status.ok() ? real_.write_durably(path, bytes) : write_status;
  }
  absl::StatusOr<std::string> read(const std::string& path) const override {
    absl::StatusOr<std::string> bytes = real_.read(path);
    after_read(path);
    return bytes;
  }
  absl::StatusOr<std::vector<std::string>> list(const std::string& folder) const override { return real_.list(folder); }
  absl::Status make_folder(const std::string& path) override { return real_.make_folder(path); }
  absl::Status remove_tree(const std::string& path) override { return real_.remove_tree(path); }
  bool exists(const std::string& path) const override { return real_.exists(path); }
  absl::StatusOr<std::int64_t> free_bytes(const std::string& folder) const override { return real_.free_bytes(folder); }

 private:
  RealFiles real_;
};

}  // namespace drover::process
