// The hash chain over the event rows: what was written once cannot be lost or changed unseen.
#pragma once

#include <string>
#include <string_view>

#include "google/protobuf/message_lite.h"

namespace drover::store {

// hash(n) = SHA-256(hash(n - 1), canonical bytes of event n); before the first stand 32 zero bytes.
std::string chain_start();
std::string chain_next(std::string_view before, std::string_view event_bytes);

// The same message, the same bytes: map entries in the order of their keys.
std::string canonical(const google::protobuf::MessageLite& message);

std::string hex(std::string_view bytes);  // lower case

}  // namespace drover::store
