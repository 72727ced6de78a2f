// What tells apart two requests under one id.
#pragma once

#include <string>

#include "google/protobuf/message_lite.h"

namespace drover::service {

// SHA-256 (32 bytes) of the message's canonical bytes.
std::string request_digest(const google::protobuf::MessageLite& request);

}  // namespace drover::service
