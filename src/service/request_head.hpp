// The head of a request from a stranger: taken apart by the letter of RFC 9112, or refused.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

#include "service/http_message.hpp"

namespace stanchion::service {

struct HeadLimits {
  std::size_t bytes = std::size_t{16} << 10;  ///< of the whole head
  std::size_t target_bytes = 2048;
  std::size_t fields = 64;
};

/// Why a head is refused; status 0: it is in order.
struct HeadRefusal {
  int status = 0;
  std::string code, detail;
};

/// `head` runs from the request line to the empty line. Refused: anything that two programs in a row might
/// read in two ways (a field twice where one is meant, Content-Length beside Transfer-Encoding, folded lines,
/// bare line feeds, control characters), no or several Host fields, bodies where none is meant, methods that
/// are not served. Status 400, 405, 411, 414, 431, 501 or 505. Plain function of its input.
HeadRefusal read_head(std::string_view head, RequestHead& result, const HeadLimits& limits = {});

/// %XX decoded; false when a sequence is broken or gives a control character.
bool decode_percent(std::string_view text, bool plus_is_space, std::string& result);

}  // namespace stanchion::service
