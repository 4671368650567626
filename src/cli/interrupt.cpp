#include "cli/interrupt.hpp"

#include <atomic>
#include <csignal>

namespace stanchion::cli {
namespace {

// A signal handler has no other way to reach its target.
std::atomic<CancellationToken*> guarded_token{nullptr};
static_assert(std::atomic<CancellationToken*>::is_always_lock_free);

extern "C" void on_stop_request(int) {
  if (CancellationToken* token = guarded_token.load()) token->cancel();
  std::signal(SIGINT, SIG_DFL);  // the next one kills
  std::signal(SIGTERM, SIG_DFL);
}

}  // namespace

InterruptGuard::InterruptGuard(CancellationToken& token) {
  guarded_token = &token;
  std::signal(SIGINT, on_stop_request);
  std::signal(SIGTERM, on_stop_request);
}

InterruptGuard::~InterruptGuard() {
  std::signal(SIGINT, SIG_DFL);
  std::signal(SIGTERM, SIG_DFL);
  guarded_token = nullptr;
}

}  // namespace stanchion::cli
