// What identifies a run and a candidate: the same on every machine and in every version.
#include <openssl/sha.h>

#include <cstdint>

#include "study/bytes.h"
#include "study/plan.h"

namespace drover::study {
namespace {

std::string sha256(std::string_view bytes) {
  std::string digest(SHA256_DIGEST_LENGTH, '\0');
  SHA256(reinterpret_cast<const unsigned char*>(bytes.data()), bytes.size(),
         reinterpret_cast<unsigned char*>(digest.data()));
  return digest;
}

// Eight bytes, little-endian.
void add_number(std::string& bytes, std::uint64_t number) {
  for (int shift = 0; shift < 64; shift += 8) bytes.push_back(static_cast<char>((number >> shift) & 0xff));
}

// With its length before it, so that no two lists of texts give the same bytes.
void add_text(std::string& bytes, std::string_view text) {
  add_number(bytes, text.size());
  bytes.append(text);
}

}  // namespace

std::string StudyPlan::input_digest(std::string_view code_digest, std::span<const v1::NamedValue> inputs,
                                    int replicate) {
  std::string bytes = "drover input 1\n";
  add_text(bytes, code_digest);
  add_number(bytes, inputs.size());
  for (const v1::NamedValue& input : inputs) {
    add_text(bytes, input.name());
    add_text(bytes, input.unit());
    if (input.has_text()) {
      bytes.push_back('t');
      add_text(bytes, input.text());
    } else {
      bytes.push_back('n');
      bytes.append(pack_double(input.number()));
    }
  }
  add_number(bytes, static_cast<std::uint64_t>(replicate));
  return sha256(bytes);
}

std::string StudyPlan::candidate_digest(std::span<const double> values) { return sha256(pack_doubles(values)); }

}  // namespace drover::study
