#include "search/saved_state.h"

#include <bit>
#include <cmath>
#include <cstdint>

#include "absl/strings/str_cat.h"
#include "google/protobuf/io/coded_stream.h"
#include "google/protobuf/io/zero_copy_stream_impl_lite.h"
#include "search/state/state.pb.h"
#include "status/try.h"

namespace drover::search {
namespace {

constexpr std::uint32_t kFormat = 1;

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

// FNV-1a (Fowler, Noll and Vo) with the bits of each state spread once more: it finds accidents, not intent.
std::uint64_t checksum(std::string_view bytes) {
  std::uint64_t hash = 14695981039346656037ull;
  for (const unsigned char byte : bytes) hash = (hash ^ byte) * 1099511628211ull;
  return hash ^ (hash >> 29);
}

state::Saved wrapping(const Space& space, const Settings& settings) {
  state::Saved saved;
  saved.set_format(kFormat);
  saved.set_method(settings.method);
  saved.set_space(space.fingerprint());
  saved.set_seed(settings.seed);
  saved.set_population(settings.population);
  saved.set_numbers(point_bytes({settings.tolerance, settings.share}));
  return saved;
}

}  // namespace

std::string wrap_state(const Space& space, const Settings& settings, const google::protobuf::MessageLite& content) {
  state::Saved saved = wrapping(space, settings);
  saved.set_content(canonical(content));
  saved.set_checksum(checksum(canonical(saved)));
  return canonical(saved);
}

absl::Status unwrap_state(std::string_view bytes, const Space& space, const Settings& settings,
                          google::protobuf::MessageLite& content) {
  state::Saved saved;
  if (!saved.ParseFromArray(bytes.data(), static_cast<int>(bytes.size()))) {
    return absl::DataLossError("the saved state of the search cannot be read");
  }
  if (saved.format() > kFormat) {
    return absl::InvalidArgumentError(absl::StrCat("the saved state of the search has format ", saved.format(),
                                                   ", this program knows up to ", kFormat));
  }
  state::Saved unsummed = saved;
  unsummed.clear_checksum();
  if (saved.format() == 0 || checksum(canonical(unsummed)) != saved.checksum() || canonical(saved) != bytes) {
    return absl::DataLossError("the saved state of the search is damaged");
  }
  state::Saved expected = wrapping(space, settings);
  expected.set_content(saved.content());
  if (canonical(expected) != canonical(unsummed)) {
    return absl::InvalidArgumentError("the saved state is of another method, space or settings");
  }
  if (!content.ParseFromString(saved.content()) || canonical(content) != saved.content()) {
    return absl::DataLossError("the saved state of the search is damaged");
  }
  return absl::OkStatus();
}

std::string point_bytes(const Point& point) {
  std::string bytes;
  bytes.reserve(point.size() * 8);
  for (const double coordinate : point) {
    const auto bits = std::bit_cast<std::uint64_t>(coordinate);
    for (int shift = 0; shift < 64; shift += 8) bytes.push_back(static_cast<char>((bits >> shift) & 0xff));
  }
  return bytes;
}

absl::StatusOr<Point> point_from(const std::string& bytes, std::size_t size) {
  if (bytes.size() != size * 8) return absl::DataLossError("the saved state of the search has a point of another size");
  Point point(size);
  for (std::size_t i = 0; i < size; ++i) {
    std::uint64_t bits = 0;
    for (std::size_t byte = 0; byte < 8; ++byte) {
      bits |= static_cast<std::uint64_t>(static_cast<unsigned char>(bytes[i * 8 + byte])) << (8 * byte);
    }
    point[i] = std::bit_cast<double>(bits);
    if (!std::isfinite(point[i]))
      return absl::DataLossError("the saved state of the search has a number that is not finite");
  }
  return point;
}

}  // namespace drover::search
