// Randomness as a function: nothing to save, nothing to advance, and a draw added in one place moves no other.
//
// Philox4x32-10: Salmon, Moraes, Dror and Shaw (2011), "Parallel random numbers: as easy as 1, 2, 3", SC '11.
#pragma once

#include <array>
#include <cstdint>

namespace drover::search {

using Words = std::array<std::uint32_t, 4>;

// One block of four words for a 128-bit counter and a 64-bit key.
constexpr Words philox(Words counter, std::array<std::uint32_t, 2> key) {
  for (int round = 0; round < 10; ++round) {
    const std::uint64_t p = 0xD2511F53ull * counter[0], q = 0xCD9E8D57ull * counter[2];
    counter = {static_cast<std::uint32_t>(q >> 32) ^ counter[1] ^ key[0], static_cast<std::uint32_t>(q),
               static_cast<std::uint32_t>(p >> 32) ^ counter[3] ^ key[1], static_cast<std::uint32_t>(p)};
    key = {key[0] + 0x9E3779B9u, key[1] + 0xBB67AE85u};
  }
  return counter;
}

// What a draw is for. Values are part of every study's result: never change or reuse one.
enum class Purpose : std::uint32_t { kScramble = 1, kLeap = 2, kCategory = 3 };

// 64 random bits of draw `index` for ask `number`.
constexpr std::uint64_t draw_bits(std::uint64_t seed, std::int64_t number, Purpose purpose, std::uint32_t index) {
  const auto n = static_cast<std::uint64_t>(number);
  const Words words = philox(
      {static_cast<std::uint32_t>(n), static_cast<std::uint32_t>(n >> 32), static_cast<std::uint32_t>(purpose), index},
      {static_cast<std::uint32_t>(seed), static_cast<std::uint32_t>(seed >> 32)});
  return (static_cast<std::uint64_t>(words[1]) << 32) | words[0];
}

// Uniform in [0, 1), a multiple of 2^-53.
constexpr double draw(std::uint64_t seed, std::int64_t number, Purpose purpose, std::uint32_t index) {
  return static_cast<double>(draw_bits(seed, number, purpose, index) >> 11) * 0x1.0p-53;
}

}  // namespace drover::search
