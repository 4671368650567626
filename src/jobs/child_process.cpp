#include "jobs/child_process.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <signal.h>
#include <sys/prctl.h>
#include <sys/resource.h>
#include <sys/syscall.h>
#include <sys/wait.h>
#include <unistd.h>

#include <cerrno>
#include <cmath>
#include <cstring>
#include <limits>
#include <utility>

#include "base/file_handle.hpp"
#include "jobs/progress_pipe.hpp"
#include "jobs/strict_json.hpp"
#include "model/byte_size.hpp"
#include "model/exit_code.hpp"

namespace stanchion {
namespace {

constexpr Offset kMebi = Offset{1} << 20;
constexpr int kProgressHandle = 3;     // in the child
constexpr int kFirstSpareHandle = 10;  // above all that the child is given
constexpr std::size_t kLongestLine = 65'536;

// A sanitizer reserves terabytes of private memory for its shadow, which RLIMIT_DATA would count.
#if defined(__SANITIZE_ADDRESS__) || defined(__SANITIZE_THREAD__)
constexpr bool kLimitsData = false;
#elif defined(__has_feature)
#if __has_feature(address_sanitizer) || __has_feature(thread_sanitizer)
constexpr bool kLimitsData = false;
#else
constexpr bool kLimitsData = true;
#endif
#else
constexpr bool kLimitsData = true;
#endif

/// Gives the same file a number that the child will not be given for something else.
bool move_up(FileHandle& handle) {
  FileHandle moved(::fcntl(handle.get(), F_DUPFD_CLOEXEC, kFirstSpareHandle));
  if (!moved) return false;
  handle = std::move(moved);  // the old number is closed
  return true;
}

struct Pipe {
  FileHandle read, write;
};

bool open_pipe(Pipe& pipe) {
  int ends[2];
  if (::pipe2(ends, O_CLOEXEC) != 0) return false;
  pipe.read = FileHandle(ends[0]);
  pipe.write = FileHandle(ends[1]);
  return move_up(pipe.read) && move_up(pipe.write);
}

Status cannot_start(const std::string& what) {
  return Status::resource_limit(
      "cannot-start", fmt::format("no child can be started: {}: {}", what, std::strerror(errno)), "",
      "run fewer jobs at a time, or raise the limits of processes and open files");
}

/// Everything the child needs before it runs the program.
struct Launch {
  const char* program;
  const char* working_folder;
  char* const* arguments;
  char* const* environment;
  int input, log, progress, failure;
  rlim_t memory, cpu;
  int niceness;
  pid_t parent;
};

void limit(int resource, rlim_t soft, rlim_t hard) {
  const struct rlimit limits { soft, hard };
  ::setrlimit(static_cast<__rlimit_resource>(resource), &limits);
}

/// Runs in the child, on the parent's memory: system calls only, nothing allocated, nothing of the parent's
/// changed.
[[noreturn]] void become(const Launch& launch) {
  const auto fail = [&launch]() {
    const int error = errno;
    const ssize_t written = ::write(launch.failure, &error, sizeof error);
    ::_exit(written == sizeof error ? 127 : 126);
  };
  // No handler of the parent's may run here, on the parent's memory.
  for (const int number : {SIGINT, SIGTERM, SIGHUP, SIGQUIT, SIGALRM, SIGCHLD, SIGUSR1, SIGUSR2}) {
    if (::signal(number, SIG_DFL) == SIG_IGN) ::signal(number, SIG_IGN);
  }
  ::signal(SIGPIPE, SIG_DFL);
  sigset_t none;
  sigemptyset(&none);
  ::sigprocmask(SIG_SETMASK, &none, nullptr);
  ::setpgid(0, 0);
  ::prctl(PR_SET_PDEATHSIG, SIGKILL);
  if (::getppid() != launch.parent) ::_exit(126);  // the parent went before the line above
  if (launch.working_folder != nullptr && ::chdir(launch.working_folder) != 0) fail();
  if (::dup2(launch.input, 0) < 0 || ::dup2(launch.log, 1) < 0 || ::dup2(launch.log, 2) < 0 ||
      ::dup2(launch.progress, kProgressHandle) < 0) {
    fail();
  }
  ::syscall(SYS_close_range, kProgressHandle + 1, ~0U, 4U /* CLOSE_RANGE_CLOEXEC */);
  // When memory runs out the kernel takes the child first, not the one that keeps the records.
  if (const int score = ::open("/proc/self/oom_score_adj", O_WRONLY | O_CLOEXEC); score >= 0) {
    const ssize_t written = ::write(score, "1000", 4);
    (void)written;
    ::close(score);
  }
  if (launch.niceness > 0) ::setpriority(PRIO_PROCESS, 0, ::getpriority(PRIO_PROCESS, 0) + launch.niceness);
  limit(RLIMIT_CORE, 0, 0);
  if (launch.memory != RLIM_INFINITY) limit(RLIMIT_DATA, launch.memory, launch.memory);
  if (launch.cpu != RLIM_INFINITY) limit(RLIMIT_CPU, launch.cpu, launch.cpu + 5);
  ::execve(launch.program, launch.arguments, launch.environment);
  fail();
  ::_exit(126);
}

/// The new process borrows the memory of this thread, which waits, until it runs the program: copying the
/// page tables of a service, and its page faults afterwards, took longer than a small job.
pid_t start_child(const Launch& launch) {
  sigset_t all, before;
  sigfillset(&all);
  ::pthread_sigmask(SIG_SETMASK, &all, &before);
  const pid_t pid = ::vfork();
  if (pid == 0) become(launch);
  const int error = errno;
  ::pthread_sigmask(SIG_SETMASK, &before, nullptr);
  errno = error;
  return pid;
}

bool is_crash(int number) {
  for (const int crash : {SIGSEGV, SIGBUS, SIGILL, SIGFPE, SIGABRT, SIGSYS, SIGTRAP}) {
    if (number == crash) return true;
  }
  return false;
}

}  // namespace

bool limits_memory() {
  return kLimitsData;
}

Offset memory_limit_of(Offset bytes, int threads) {
  constexpr Offset kAllowance = 256 * kMebi, kAllowanceAThread = 160 * kMebi;
  return bytes + bytes / 8 + kAllowance + kAllowanceAThread * threads;
}

Result<ChildProcess> ChildProcess::start(const ChildPlan& plan) {
  std::vector<std::string> words{"stanchion"};
  words.insert(words.end(), plan.arguments.begin(), plan.arguments.end());
  words.push_back(fmt::format("--progress-fd={}", kProgressHandle));
  std::vector<char*> pointers;
  for (std::string& word : words) pointers.push_back(word.data());
  pointers.push_back(nullptr);

  // OpenBLAS starts a thread a processor, each with 128 MiB of its own, and a thread that cannot have them
  // tries for ever. The program's own threads are none of them.
  std::string one_thread = "OPENBLAS_NUM_THREADS=1";
  std::vector<char*> environment;
  for (char** variable = environ; *variable != nullptr; ++variable) {
    if (std::strncmp(*variable, one_thread.c_str(), one_thread.find('=') + 1) != 0)
      environment.push_back(*variable);
  }
  environment.push_back(one_thread.data());
  environment.push_back(nullptr);

  FileHandle input(::open("/dev/null", O_RDONLY | O_CLOEXEC));
  const std::string log_path = plan.log.empty() ? "/dev/null" : plan.log;
  FileHandle log(::open(log_path.c_str(), O_WRONLY | O_CREAT | O_APPEND | O_CLOEXEC, 0666));
  if (log.get() < 0) return cannot_start("its log " + log_path);
  Pipe progress, failure;
  if (input.get() < 0 || !move_up(input) || !move_up(log) || !open_pipe(progress) || !open_pipe(failure)) {
    return cannot_start("its handles");
  }
  Launch launch{plan.program.c_str(), plan.working_folder.empty() ? nullptr : plan.working_folder.c_str(),
                pointers.data(),      environment.data(),
                input.get(),          log.get(),
                progress.write.get(), failure.write.get(),
                RLIM_INFINITY,        RLIM_INFINITY,
                plan.niceness,        ::getpid()};
  if (plan.memory_bytes && kLimitsData) {
    launch.memory = static_cast<rlim_t>(memory_limit_of(*plan.memory_bytes, plan.threads));
  }
  if (plan.cpu_seconds) launch.cpu = static_cast<rlim_t>(*plan.cpu_seconds);

  const pid_t pid = start_child(launch);
  if (pid < 0) return cannot_start("fork");
  ChildProcess child;
  child.pid_ = pid;
  ::setpgid(pid, pid);  // also here, so that stop() reaches it from now on
  child.pidfd_ = static_cast<int>(::syscall(SYS_pidfd_open, pid, 0));
  if (child.pidfd_ < 0) return cannot_start("its end cannot be watched");
  ::fcntl(progress.read.get(), F_SETFL, O_NONBLOCK);
  child.pipe_ = progress.read.release();
  child.memory_bytes_ = plan.memory_bytes;
  child.cpu_seconds_ = plan.cpu_seconds;
  failure.write = FileHandle();
  progress.write = FileHandle();
  int error = 0;
  ssize_t count = 0;
  do {
    count = ::read(failure.read.get(), &error, sizeof error);
  } while (count < 0 && errno == EINTR);
  if (count == sizeof error) {
    child.wait();
    errno = error;
    return cannot_start(plan.program);
  }
  return child;
}

ChildProcess::ChildProcess(ChildProcess&& other) noexcept {
  *this = std::move(other);
}

ChildProcess& ChildProcess::operator=(ChildProcess&& other) noexcept {
  if (this == &other) return *this;
  release();
  pid_ = std::exchange(other.pid_, -1);
  pidfd_ = std::exchange(other.pidfd_, -1);
  pipe_ = std::exchange(other.pipe_, -1);
  stopping_ = other.stopping_;
  memory_bytes_ = other.memory_bytes_;
  cpu_seconds_ = other.cpu_seconds_;
  used_cpu_seconds_ = other.used_cpu_seconds_;
  pending_ = std::move(other.pending_);
  progress_ = std::move(other.progress_);
  failure_ = std::move(other.failure_);
  end_ = std::move(other.end_);
  return *this;
}

ChildProcess::~ChildProcess() {
  release();
}

void ChildProcess::release() {
  if (pid_ > 0 && !end_) {
    kill();
    wait();
  }
  if (pipe_ >= 0) ::close(std::exchange(pipe_, -1));
  if (pidfd_ >= 0) ::close(std::exchange(pidfd_, -1));
  pid_ = -1;
}

void ChildProcess::take_line(const std::string& line) {
  const auto json = strict_json(line);
  if (!json.ok() || !json->is_object()) return;
  const auto text = [](const nlohmann::json& object, const char* key) {
    return object.contains(key) && object[key].is_string() ? object[key].get<std::string>() : std::string();
  };
  if (json->contains("failure") && (*json)["failure"].is_object()) {
    const auto& failure = (*json)["failure"];
    failure_ = {text(failure, "kind"), text(failure, "code"), text(failure, "message"),
                text(failure, "place"), text(failure, "remedy")};
  } else if (json->contains("phase") && json->contains("done") && (*json)["done"].is_number()) {
    progress_.push_back({text(*json, "phase"), (*json)["done"].get<double>(), 1.0});
  }
}

void ChildProcess::read_pipe() {
  char block[4096];
  while (pipe_ >= 0) {
    const ssize_t count = ::read(pipe_, block, sizeof block);
    if (count < 0 && errno == EINTR) continue;
    if (count < 0 && errno == EAGAIN) return;
    if (count <= 0) {
      ::close(std::exchange(pipe_, -1));
      return;
    }
    pending_.append(block, static_cast<std::size_t>(count));
    std::size_t begin = 0;
    for (std::size_t end; (end = pending_.find('\n', begin)) != std::string::npos; begin = end + 1) {
      take_line(pending_.substr(begin, end - begin));
    }
    pending_.erase(0, begin);
    if (pending_.size() > kLongestLine) pending_.clear();
  }
}

std::vector<ChildProgress> ChildProcess::progress() {
  read_pipe();
  return std::exchange(progress_, {});
}

ChildEnd ChildProcess::end_of(int status) {
  ChildEnd end;
  end.failure = failure_;
  if (WIFEXITED(status)) {
    end.exit_code = WEXITSTATUS(status);
    if (failure_) end.reason = failure_->message;
    if (failure_ && failure_->code == "out-of-memory" && memory_bytes_) {
      end.kind = ChildEndKind::kMemory;
      end.reason = "it needed more memory than its limit of " + size_allowed(*memory_bytes_);
    } else if (end.exit_code == kExitInterrupted) {
      end.kind = stopping_ ? ChildEndKind::kStopped : ChildEndKind::kKilled;
      end.reason = stopping_ ? "it was stopped on request" : "somebody asked it to stop";
    } else if (end.exit_code > kExitInternal) {
      end.kind = ChildEndKind::kCrashed;
      end.reason =
          fmt::format("it ended with the exit code {}, which is none of the program's", end.exit_code);
      end.exit_code = kExitInternal;
    } else if (end.exit_code == kExitInternal && end.reason.empty()) {
      end.reason = "a defect of the program; its log says more";
    }
    return end;
  }
  end.signal = WTERMSIG(status);
  const char* name = strsignal(end.signal);
  if (end.signal == SIGXCPU || (end.signal == SIGKILL && cpu_seconds_ && !stopping_ &&
                                used_cpu_seconds_ >= static_cast<double>(*cpu_seconds_))) {
    end.kind = ChildEndKind::kCpuTime;
    end.exit_code = kExitResource;
    end.reason = cpu_seconds_ ? fmt::format("it used up its {} s of processor time", *cpu_seconds_)
                              : "it used up its processor time";
  } else if (stopping_) {
    end.kind = ChildEndKind::kStopped;
    end.exit_code = kExitInterrupted;
    end.reason = "it was stopped on request";
  } else if (is_crash(end.signal)) {
    end.kind = ChildEndKind::kCrashed;
    end.exit_code = kExitInternal;
    end.reason = fmt::format("it crashed: {} (signal {})", name, end.signal);
  } else {
    end.kind = ChildEndKind::kKilled;
    end.exit_code = kExitResource;
    end.reason = end.signal == SIGKILL
                     ? std::string("it was killed: by the kernel for lack of memory, or by somebody")
                     : fmt::format("it was ended by a signal: {} (signal {})", name, end.signal);
  }
  return end;
}

std::optional<ChildEnd> ChildProcess::poll() {
  if (end_ || pid_ <= 0) return end_;
  int status = 0;
  struct rusage used {};
  pid_t waited = 0;
  do {
    waited = ::wait4(pid_, &status, WNOHANG, &used);
  } while (waited < 0 && errno == EINTR);
  if (waited == 0) return std::nullopt;
  read_pipe();
  const auto seconds = [](const struct timeval& time) {
    return static_cast<double>(time.tv_sec) + 1e-6 * static_cast<double>(time.tv_usec);
  };
  used_cpu_seconds_ = seconds(used.ru_utime) + seconds(used.ru_stime);
  ChildEnd end = end_of(status);
  end.cpu_seconds = used_cpu_seconds_;
  end.peak_bytes = Offset{used.ru_maxrss} * 1024;
  end_ = std::move(end);
  return end_;
}

ChildEnd ChildProcess::wait() {
  siginfo_t info;
  while (!end_ && ::waitid(P_PID, static_cast<id_t>(pid_), &info, WEXITED | WNOWAIT) != 0 && errno == EINTR) {
  }
  return poll().value_or(ChildEnd{});
}

void ChildProcess::stop() {
  stopping_ = true;
  if (pid_ > 0 && !end_) ::kill(-pid_, SIGTERM);
}

void ChildProcess::kill() {
  stopping_ = true;
  if (pid_ > 0 && !end_) ::kill(-pid_, SIGKILL);
}

}  // namespace stanchion
