// This program, started once more as a child of its own: limited in memory and time, ended with its parent,
// its end told in plain words.
#pragma once

#include <sys/types.h>

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

struct ChildPlan {
  std::string program = "/proc/self/exe";
  std::vector<std::string> arguments;       ///< see arguments_of; runner's options are added by the caller
  std::string working_folder;               ///< empty: that of the parent
  std::string log;                          ///< file to which standard output and error are appended
  std::optional<Offset> memory_bytes;       ///< what the run itself may use, see memory_limit_of
  std::optional<std::int64_t> cpu_seconds;  ///< of all its threads together
  int threads = 0;                          ///< that the child will use; 0: every processor
  int niceness = 0;                         ///< above that of the parent
};

/// One line of --progress-fd.
struct ChildProgress {
  std::string phase;
  double done = 0, total = 1;
};

/// The child's own account of its failure, from the same pipe.
struct ChildFailure {
  std::string kind;  ///< "bad_usage", "bad_input", "resource_limit", "interrupted" or "internal"
  std::string code, message, place, remedy;
};

enum class ChildEndKind {
  kExited,   ///< on its own, with an exit code
  kMemory,   ///< it met its memory limit, or the kernel took it for lack of memory
  kCpuTime,  ///< it met its limit of processor time
  kStopped,  ///< terminated because stop() or kill() was called
  kKilled,   ///< by a signal that somebody sent
  kCrashed,  ///< a defect: segmentation fault and the like
};

struct ChildEnd {
  ChildEndKind kind = ChildEndKind::kExited;
  int exit_code = 0;  ///< as the program's table of exit codes has it, also for the other kinds
  int signal = 0;
  std::string reason;  ///< in plain words; empty when it answered
  std::optional<ChildFailure> failure;
  double cpu_seconds = 0;
  Offset peak_bytes = 0;
};

/// Moves, does not copy. Destroyed while the child runs: the child is killed and waited for. Not thread safe;
/// the child ends with the *thread* that started it (PR_SET_PDEATHSIG), so start children from a thread that
/// outlives them.
class ChildProcess {
 public:
  /// No child: poll() and wait() give an empty end.
  ChildProcess() = default;

  /// Resource limit "cannot-start" when there is no process or no handle left, or the log cannot be written.
  static Result<ChildProcess> start(const ChildPlan& plan);

  ChildProcess(ChildProcess&& other) noexcept;
  ChildProcess& operator=(ChildProcess&& other) noexcept;
  ~ChildProcess();

  pid_t pid() const { return pid_; }

  /// To be put in a poll for reading: `end_handle` is readable once the child has ended (a pidfd),
  /// `progress_handle` when there is progress to be read, -1 once there will be none.
  int end_handle() const { return pidfd_; }
  int progress_handle() const { return pipe_; }

  /// What has come since the last call, oldest first; never waits.
  std::vector<ChildProgress> progress();

  /// How it ended, or nothing while it runs. Never waits.
  std::optional<ChildEnd> poll();

  /// Waits for the end.
  ChildEnd wait();

  /// Asks the child to stop (SIGTERM to its process group): it ends with 130 and leaves nothing half-written.
  void stop();

  /// Ends it at once.
  void kill();

 private:
  void read_pipe();
  void take_line(const std::string& line);
  ChildEnd end_of(int status);
  void release();

  pid_t pid_ = -1;
  int pidfd_ = -1, pipe_ = -1;
  bool stopping_ = false;
  double used_cpu_seconds_ = 0;
  std::optional<Offset> memory_bytes_;
  std::optional<std::int64_t> cpu_seconds_;
  std::string pending_;
  std::vector<ChildProgress> progress_;
  std::optional<ChildFailure> failure_;
  std::optional<ChildEnd> end_;
};

/// The RLIMIT_DATA that goes with a run that may use `bytes`. It counts private writable memory, touched or
/// not: thread stacks (8 MiB a thread), the 128 MiB that OpenBLAS sets aside a thread that calls it (and for
/// which it tries for ever when they are refused), allocator slack; so an allowance for these is added.
/// RLIMIT_AS would also count mapped input files and the 128 MiB of address space that the allocator sets
/// aside a thread, and RLIMIT_RSS does nothing on Linux.
Offset memory_limit_of(Offset bytes, int threads);

/// Whether this build can be limited so: a sanitizer's shadow memory would count.
bool limits_memory();

}  // namespace stanchion
