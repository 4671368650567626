#include "base/digest.hpp"

#include <cpuid.h>
#include <immintrin.h>

#include <algorithm>
#include <bit>
#include <cstring>

namespace stanchion {
namespace {

// First 32 bits of the fractional parts of the cube roots of the first 64 primes (FIPS 180-4, 4.2.2).
alignas(16) constexpr std::uint32_t kRound[64] = {
    0x428a2f98, 0x71374491, 0xb5c0fbcf, 0xe9b5dba5, 0x3956c25b, 0x59f111f1, 0x923f82a4, 0xab1c5ed5,
    0xd807aa98, 0x12835b01, 0x243185be, 0x550c7dc3, 0x72be5d74, 0x80deb1fe, 0x9bdc06a7, 0xc19bf174,
    0xe49b69c1, 0xefbe4786, 0x0fc19dc6, 0x240ca1cc, 0x2de92c6f, 0x4a7484aa, 0x5cb0a9dc, 0x76f988da,
    0x983e5152, 0xa831c66d, 0xb00327c8, 0xbf597fc7, 0xc6e00bf3, 0xd5a79147, 0x06ca6351, 0x14292967,
    0x27b70a85, 0x2e1b2138, 0x4d2c6dfc, 0x53380d13, 0x650a7354, 0x766a0abb, 0x81c2c92e, 0x92722c85,
    0xa2bfe8a1, 0xa81a664b, 0xc24b8b70, 0xc76c51a3, 0xd192e819, 0xd6990624, 0xf40e3585, 0x106aa070,
    0x19a4c116, 0x1e376c08, 0x2748774c, 0x34b0bcb5, 0x391c0cb3, 0x4ed8aa4a, 0x5b9cca4f, 0x682e6ff3,
    0x748f82ee, 0x78a5636f, 0x84c87814, 0x8cc70208, 0x90befffa, 0xa4506ceb, 0xbef9a3f7, 0xc67178f2};

std::uint32_t big_endian(const unsigned char* bytes) {
  return std::uint32_t{bytes[0]} << 24 | std::uint32_t{bytes[1]} << 16 | std::uint32_t{bytes[2]} << 8 |
         std::uint32_t{bytes[3]};
}

void hash_blocks(std::uint32_t* state, const unsigned char* data, std::size_t blocks) {
  static const bool native = detail::sha_instructions();
  if (native) {
    detail::sha256_blocks_native(state, data, blocks);
  } else {
    detail::sha256_blocks_plain(state, data, blocks);
  }
}

}  // namespace

namespace detail {

bool sha_instructions() {
  // Leaf 7, EBX bit 29; asked of the processor itself because clang 14 has no name for it.
  unsigned a = 0, b = 0, c = 0, d = 0;
  if (__get_cpuid_count(7, 0, &a, &b, &c, &d) == 0) return false;
  return (b >> 29 & 1U) != 0 && __builtin_cpu_supports("sse4.1") != 0;
}

void sha256_blocks_plain(std::uint32_t* state, const unsigned char* data, std::size_t blocks) {
  for (; blocks > 0; --blocks, data += 64) {
    std::uint32_t w[64];
    for (int t = 0; t < 16; ++t) w[t] = big_endian(data + 4 * t);
    for (int t = 16; t < 64; ++t) {
      const std::uint32_t s0 = std::rotr(w[t - 15], 7) ^ std::rotr(w[t - 15], 18) ^ (w[t - 15] >> 3);
      const std::uint32_t s1 = std::rotr(w[t - 2], 17) ^ std::rotr(w[t - 2], 19) ^ (w[t - 2] >> 10);
      w[t] = w[t - 16] + s0 + w[t - 7] + s1;
    }
    std::uint32_t v[8];
    std::memcpy(v, state, sizeof v);
    auto& [a, b, c, d, e, f, g, h] = v;
    for (int t = 0; t < 64; ++t) {
      const std::uint32_t t1 = h + (std::rotr(e, 6) ^ std::rotr(e, 11) ^ std::rotr(e, 25)) +
                               ((e & f) ^ (~e & g)) + kRound[t] + w[t];
      const std::uint32_t t2 =
          (std::rotr(a, 2) ^ std::rotr(a, 13) ^ std::rotr(a, 22)) + ((a & b) ^ (a & c) ^ (b & c));
      h = g, g = f, f = e, e = d + t1, d = c, c = b, b = a, a = t1 + t2;
    }
    for (int i = 0; i < 8; ++i) state[i] += v[i];
  }
}

// The instructions keep the state as two vectors, (a b e f) and (c d g h), and do two rounds each.
__attribute__((target("sha,sse4.1"))) void sha256_blocks_native(std::uint32_t* state,
                                                                const unsigned char* data,
                                                                std::size_t blocks) {
  const auto set = [](std::uint32_t x3, std::uint32_t x2, std::uint32_t x1, std::uint32_t x0) {
    const std::uint32_t lanes[4] = {x0, x1, x2, x3};
    __m128i vector;
    std::memcpy(&vector, lanes, sizeof vector);
    return vector;
  };
  const __m128i swap_bytes = set(0x0c0d0e0f, 0x08090a0b, 0x04050607, 0x00010203);
  __m128i abef = set(state[0], state[1], state[4], state[5]);
  __m128i cdgh = set(state[2], state[3], state[6], state[7]);
  for (; blocks > 0; --blocks, data += 64) {
    const __m128i abef_before = abef, cdgh_before = cdgh;
    __m128i w[4];
    for (int i = 0; i < 4; ++i) {
      w[i] = _mm_loadu_si128(reinterpret_cast<const __m128i*>(data) + i);
      w[i] = _mm_shuffle_epi8(w[i], swap_bytes);
    }
    for (int group = 0; group < 16; ++group) {
      const __m128i now = w[group & 3];
      const __m128i sum =
          _mm_add_epi32(now, _mm_load_si128(reinterpret_cast<const __m128i*>(kRound) + group));
      cdgh = _mm_sha256rnds2_epu32(cdgh, abef, sum);
      abef = _mm_sha256rnds2_epu32(abef, cdgh, _mm_shuffle_epi32(sum, 0x0e));
      if (group < 12) {
        const __m128i next1 = w[(group + 1) & 3], next2 = w[(group + 2) & 3], next3 = w[(group + 3) & 3];
        const __m128i partial =
            _mm_add_epi32(_mm_sha256msg1_epu32(now, next1), _mm_alignr_epi8(next3, next2, 4));
        w[group & 3] = _mm_sha256msg2_epu32(partial, next3);
      }
    }
    abef = _mm_add_epi32(abef, abef_before);
    cdgh = _mm_add_epi32(cdgh, cdgh_before);
  }
  std::uint32_t lanes[4];
  std::memcpy(lanes, &abef, sizeof lanes);
  state[5] = lanes[0], state[4] = lanes[1], state[1] = lanes[2], state[0] = lanes[3];
  std::memcpy(lanes, &cdgh, sizeof lanes);
  state[7] = lanes[0], state[6] = lanes[1], state[3] = lanes[2], state[2] = lanes[3];
}

}  // namespace detail

// Square roots of the first 8 primes (FIPS 180-4, 5.3.3).
Sha256::Sha256()
    : state_{0x6a09e667, 0xbb67ae85, 0x3c6ef372, 0xa54ff53a, 0x510e527f, 0x9b05688c, 0x1f83d9ab, 0x5be0cd19} {
}

void Sha256::update(std::string_view bytes) {
  const auto* data = reinterpret_cast<const unsigned char*>(bytes.data());
  std::size_t size = bytes.size();
  total_bytes_ += size;
  if (tail_size_ > 0) {
    const std::size_t taken = std::min(size, tail_.size() - tail_size_);
    std::memcpy(tail_.data() + tail_size_, data, taken);
    tail_size_ += taken, data += taken, size -= taken;
    if (tail_size_ < tail_.size()) return;
    hash_blocks(state_.data(), tail_.data(), 1);
    tail_size_ = 0;
  }
  hash_blocks(state_.data(), data, size / 64);
  tail_size_ = size % 64;
  if (tail_size_ > 0) std::memcpy(tail_.data(), data + (size - tail_size_), tail_size_);
}

std::string Sha256::finish() {
  const std::uint64_t bits = total_bytes_ * 8;
  std::string padding(1, '\x80');
  while ((tail_size_ + padding.size()) % 64 != 56) padding.push_back('\0');
  for (int shift = 56; shift >= 0; shift -= 8) padding.push_back(static_cast<char>(bits >> shift & 0xff));
  update(padding);
  std::string digits;
  for (const std::uint32_t word : state_) {
    for (int shift = 28; shift >= 0; shift -= 4) digits.push_back("0123456789abcdef"[word >> shift & 0xf]);
  }
  return digits;
}

std::string sha256(std::string_view bytes) {
  Sha256 digest;
  digest.update(bytes);
  return digest.finish();
}

}  // namespace stanchion
