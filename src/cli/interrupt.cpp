#include "cli/interrupt.hpp"

#include <signal.h>

#include <atomic>
#include <mutex>

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

namespace {

using Handler = __sighandler_t;

/// As System V's signal(): the handler falls away when it is called.
Handler set_once(int number, Handler handler) {
  struct sigaction action {
  }, before{};
  action.sa_handler = handler;
  action.sa_flags = SA_RESETHAND | SA_NODEFER;
  sigemptyset(&action.sa_mask);
  return sigaction(number, &action, &before) == 0 ? before.sa_handler : SIG_ERR;
}

/// Several threads put their handler on one signal and take it back, in any order: the first call sets it,
/// the last takes it back, and each is told what was there before the first.
class SharedHandler {
 public:
  Handler set(int number, Handler handler) {
    const std::lock_guard lock(mutex_);
    if (users_ > 0 && handler == before_) {
      if (--users_ == 0) set_once(number, handler);
    } else if (users_++ == 0) {
      before_ = set_once(number, handler);
    }
    return before_;
  }

 private:
  std::mutex mutex_;
  int users_ = 0;
  Handler before_ = SIG_DFL;
};

}  // namespace

// METIS puts a handler of its own on SIGTERM while it runs, which jumps out of whatever was interrupted: out
// of the allocator too, whose lock then stays taken for ever. It calls signal() as System V has it, and finds
// this one first: while a guard lives SIGINT and SIGTERM stay as they are. On SIGABRT it tells itself that
// memory ran out; there its calls in several threads share one handler. Otherwise this does what the C
// library would.
extern "C" __sighandler_t __sysv_signal(
    int number, __sighandler_t handler) noexcept {  // NOLINT(bugprone-reserved-identifier)
  static SharedHandler on_abort;
  if (number == SIGABRT) return on_abort.set(number, handler);
  const bool ours = number == SIGINT || number == SIGTERM;
  if (ours && stanchion::cli::guarded_token.load() != nullptr) {
    struct sigaction now {};
    return sigaction(number, nullptr, &now) == 0 ? now.sa_handler : SIG_ERR;
  }
  return set_once(number, handler);
}
