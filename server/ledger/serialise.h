// Bytes of a message that are stored, hashed or compared: the same message, the same bytes.
#pragma once

#include <string>

#include "google/protobuf/io/coded_stream.h"
#include "google/protobuf/io/zero_copy_stream_impl_lite.h"
#include "google/protobuf/message_lite.h"

namespace drover::ledger {

inline std::string serialise(const google::protobuf::MessageLite& message) {
  std::string bytes;
  {
    google::protobuf::io::StringOutputStream stream(&bytes);
    google::protobuf::io::CodedOutputStream coded(&stream);
    coded.SetSerializationDeterministic(true);  // maps have no order of their own
    message.SerializeToCodedStream(&coded);
  }
  return bytes;
}

}  // namespace drover::ledger
