#include "io/deflate.hpp"

#include <zlib.h>

#include <algorithm>

namespace stanchion {

struct DeflateStream::State {
  z_stream stream{};
  bool ready = false;
};

DeflateStream::DeflateStream() : state_(std::make_unique<State>()) {
  // Level 3: text of numbers hardly gets smaller beyond, and takes several times as long.
  state_->ready = deflateInit2(&state_->stream, 3, Z_DEFLATED, 15 + 16, 8, Z_DEFAULT_STRATEGY) == Z_OK;
}

DeflateStream::~DeflateStream() {
  if (state_->ready) deflateEnd(&state_->stream);
}

bool DeflateStream::compress(std::string_view bytes, bool last, std::string& out) {
  if (!state_->ready) return false;
  z_stream& stream = state_->stream;
  constexpr std::size_t kPiece = std::size_t{1} << 30;
  char buffer[1 << 15];
  do {
    const std::size_t size = std::min(bytes.size(), kPiece);
    stream.next_in = reinterpret_cast<Bytef*>(const_cast<char*>(bytes.data()));
    stream.avail_in = static_cast<uInt>(size);
    bytes.remove_prefix(size);
    do {
      stream.next_out = reinterpret_cast<Bytef*>(buffer);
      stream.avail_out = sizeof buffer;
      if (deflate(&stream, last && bytes.empty() ? Z_FINISH : Z_NO_FLUSH) == Z_STREAM_ERROR) return false;
      out.append(buffer, sizeof buffer - stream.avail_out);
    } while (stream.avail_out == 0);
  } while (!bytes.empty());
  return true;
}

}  // namespace stanchion
