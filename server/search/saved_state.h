// The wrapping of a method's saved state: what it belongs to, and a checksum. Internal to this folder.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "google/protobuf/message_lite.h"
#include "search/method.h"
#include "search/space.h"

namespace drover::search {

// Equal contents, equal bytes. Of the settings all but `parallel` count, as they were given.
std::string wrap_state(const Space& space, const Settings& settings, const google::protobuf::MessageLite& content);

// Parses `content` out of the wrapping. INVALID_ARGUMENT: of another method, space or settings, or of a later format;
// DATA_LOSS: cut or changed bytes.
absl::Status unwrap_state(std::string_view bytes, const Space& space, const Settings& settings,
                          google::protobuf::MessageLite& content);

// Doubles, bit for bit.
std::string point_bytes(const Point& point);
// DATA_LOSS unless it holds exactly `size` finite numbers.
absl::StatusOr<Point> point_from(const std::string& bytes, std::size_t size);

}  // namespace drover::search
