#include "study/bytes.h"

#include <bit>
#include <cstddef>
#include <cstdint>

#include "absl/status/status.h"
#include "absl/strings/str_cat.h"

namespace drover::study {
namespace {

constexpr std::size_t kWidth = 8;

double read_double(std::string_view bytes) {
  std::uint64_t bits = 0;
  for (std::size_t i = 0; i < kWidth; ++i) {
    bits |= static_cast<std::uint64_t>(static_cast<unsigned char>(bytes[i])) << (8 * i);
  }
  return std::bit_cast<double>(bits);
}

}  // namespace

std::string pack_doubles(std::span<const double> values) {
  std::string bytes;
  bytes.reserve(values.size() * kWidth);
  for (const double value : values) {
    const auto bits = std::bit_cast<std::uint64_t>(value);
    for (std::size_t i = 0; i < kWidth; ++i) bytes.push_back(static_cast<char>((bits >> (8 * i)) & 0xffU));
  }
  return bytes;
}

std::string pack_double(double value) { return pack_doubles({&value, 1}); }

absl::StatusOr<std::vector<double>> unpack_doubles(std::string_view bytes) {
  if (bytes.size() % kWidth != 0) {
    return absl::InvalidArgumentError(absl::StrCat(bytes.size(), " bytes are no whole number of doubles"));
  }
  std::vector<double> values;
  values.reserve(bytes.size() / kWidth);
  for (std::size_t at = 0; at < bytes.size(); at += kWidth) values.push_back(read_double(bytes.substr(at, kWidth)));
  return values;
}

absl::StatusOr<double> unpack_double(std::string_view bytes) {
  if (bytes.size() != kWidth) return absl::InvalidArgumentError(absl::StrCat(bytes.size(), " bytes are no double"));
  return read_double(bytes);
}

}  // namespace drover::study
