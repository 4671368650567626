#include "cli/interrupt.hpp"

#include <signal.h>

#include <atomic>

namespace stanchion::cli {
namespace {

// A signal handler has no other way to reach its target.
std::atomic<CancellationToken*> guarded_token{nullptr};
static_assert(std::atomic<CancellationToken*>::is_always_lock_free);

void set_handler(int number, void (*handler)(int)) {
  struct sigaction action {};
  action.sa_handler = handler;
  action.sa_flags = SA_RESTART;
  sigemptyset(&action.sa_mask);
  sigaction(number, &action, nullptr);
}

extern "C" void on_stop_request(int) {
  if (CancellationToken* token = guarded_token.load()) token->cancel();
  set_handler(SIGINT, SIG_DFL);  // the next one kills
  set_handler(SIGTERM, SIG_DFL);
}

}  // namespace

InterruptGuard::InterruptGuard(CancellationToken& token) {
  guarded_token = &token;
  set_handler(SIGINT, on_stop_request);
  set_handler(SIGTERM, on_stop_request);
}

InterruptGuard::~InterruptGuard() {
  set_handler(SIGINT, SIG_DFL);
  set_handler(SIGTERM, SIG_DFL);
  guarded_token = nullptr;
}

}  // namespace stanchion::cli

// METIS puts a handler of its own on SIGTERM while it runs, which jumps out of whatever was interrupted: out
// of the allocator too, whose lock then stays taken for ever. It calls signal() as System V has it, and finds
// this one first: while a guard lives the two signals stay as they are, and otherwise it does what the C
// library would.
extern "C" __sighandler_t __sysv_signal(
    int number, __sighandler_t handler) noexcept {  // NOLINT(bugprone-reserved-identifier)
  struct sigaction action {
  }, before{};
  const bool ours = number == SIGINT || number == SIGTERM;
  if (ours && stanchion::cli::guarded_token.load() != nullptr) {
    return sigaction(number, nullptr, &before) == 0 ? before.sa_handler : SIG_ERR;
  }
  action.sa_handler = handler;
  action.sa_flags = SA_RESETHAND | SA_NODEFER;
  sigemptyset(&action.sa_mask);
  return sigaction(number, &action, &before) == 0 ? before.sa_handler : SIG_ERR;
}
