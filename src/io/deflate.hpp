// Writing gzip.
#pragma once

#include <memory>
#include <string>
#include <string_view>

namespace stanchion {

/// Compresses pieces of text into one gzip member. The state of zlib stays behind this name.
class DeflateStream {
 public:
  DeflateStream();
  ~DeflateStream();
  DeflateStream(const DeflateStream&) = delete;
  DeflateStream& operator=(const DeflateStream&) = delete;

  /// Appends to `out` what compressing `bytes` gives so far; all of it when `last`. False: out of memory.
  bool compress(std::string_view bytes, bool last, std::string& out);

 private:
  struct State;
  std::unique_ptr<State> state_;
};

}  // namespace stanchion
