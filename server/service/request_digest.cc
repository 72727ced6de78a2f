#include "service/request_digest.h"

#include <openssl/sha.h>

#include "ledger/serialise.h"

namespace drover::service {

std::string request_digest(const google::protobuf::MessageLite& request) {
  const std::string bytes = ledger::serialise(request);
  std::string digest(SHA256_DIGEST_LENGTH, '\0');
  SHA256(reinterpret_cast<const unsigned char*>(bytes.data()), bytes.size(),
         reinterpret_cast<unsigned char*>(digest.data()));
  return digest;
}

}  // namespace drover::service
