#include "store/chain.h"

#include <openssl/sha.h>

#include "absl/strings/escaping.h"
#include "google/protobuf/io/coded_stream.h"
#include "google/protobuf/io/zero_copy_stream_impl_lite.h"

namespace drover::store {

std::string chain_start() { return std::string(SHA256_DIGEST_LENGTH, '\0'); }

std::string chain_next(std::string_view before, std::string_view event_bytes) {
  std::string both;
  both.reserve(before.size() + event_bytes.size());
  both.append(before).append(event_bytes);
  std::string hash(SHA256_DIGEST_LENGTH, '\0');
  SHA256(reinterpret_cast<const unsigned char*>(both.data()), both.size(),
         reinterpret_cast<unsigned char*>(hash.data()));
  return hash;
}

std::string canonical(const google::protobuf::MessageLite& message) {
  std::string bytes;
  {
    google::protobuf::io::StringOutputStream stream(&bytes);
    google::protobuf::io::CodedOutputStream coded(&stream);
    coded.SetSerializationDeterministic(true);
    message.SerializeToCodedStream(&coded);
  }
  return bytes;
}

std::string hex(std::string_view bytes) { return absl::BytesToHexString({bytes.data(), bytes.size()}); }

}  // namespace drover::store
