// SHA-256: the fingerprint by which documents name their input files.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <string>
#include <string_view>

namespace stanchion {

/// Streaming SHA-256 (FIPS 180-4). Uses the processor's SHA instructions where they exist; same digest either
/// way. Not thread-safe; any number of objects may work side by side.
class Sha256 {
 public:
  Sha256();

  void update(std::string_view bytes);

  /// The 64 lower-case hexadecimal digits of everything given so far. Ends the object's use.
  std::string finish();

 private:
  std::array<std::uint32_t, 8> state_;
  std::array<unsigned char, 64> tail_{};  ///< bytes that do not fill a block yet
  std::size_t tail_size_ = 0;
  std::uint64_t total_bytes_ = 0;
};

/// Digest of `bytes` in one call.
std::string sha256(std::string_view bytes);

namespace detail {
/// The block functions behind Sha256; `blocks` times 64 bytes. The second needs `sha_instructions()`.
void sha256_blocks_plain(std::uint32_t* state, const unsigned char* data, std::size_t blocks);
void sha256_blocks_native(std::uint32_t* state, const unsigned char* data, std::size_t blocks);
bool sha_instructions();
}  // namespace detail

}  // namespace stanchion
