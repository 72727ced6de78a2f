// The disk, with honest verbs.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover::process {

// Errors name the path: RESOURCE_EXHAUSTED the disk or the quota is full; NOT_FOUND; PERMISSION_DENIED; UNAVAILABLE the
// rest. Thread-safe.
class Files {
 public:
  virtual ~Files() = default;
  // After OK the bytes survive a power loss; after an error the old content is there, or in rare cases the new one, and
  // whole in any case.
  virtual absl::Status write_durably(const std::string& path, std::string_view bytes) = 0;
  virtual absl::StatusOr<std::string> read(const std::string& path) const = 0;
  virtual absl::StatusOr<std::vector<std::string>> list(const std::string& folder) const = 0;  // names, sorted
  // With its parents, mode 0700, durably. OK where it is there already.
  virtual absl::Status make_folder(const std::string& path) = 0;
  // With all that is in it; never follows a link. OK where there is none.
  virtual absl::Status remove_tree(const std::string& path) = 0;
  virtual bool exists(const std::string& path) const = 0;
  virtual absl::StatusOr<std::int64_t> free_bytes(const std::string& folder) const = 0;
};

class RealFiles final : public Files {
 public:
  absl::Status write_durably(const std::string& path, std::string_view bytes) override;
  absl::StatusOr<std::string> read(const std::string& path) const override;
  absl::StatusOr<std::vector<std::string>> list(const std::string& folder) const override;
  absl::Status make_folder(const std::string& path) override;
  absl::Status remove_tree(const std::string& path) override;
  bool exists(const std::string& path) const override;
  absl::StatusOr<std::int64_t> free_bytes(const std::string& folder) const override;
};

}  // namespace drover::process
