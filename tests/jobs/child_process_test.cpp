#include "jobs/child_process.hpp"

#include <fcntl.h>
#include <gtest/gtest.h>
#include <poll.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <fstream>

#include "jobs/durable_file.hpp"
#include "jobs/folder.hpp"

namespace stanchion {
namespace {

ChildPlan shell(const std::string& script) {
  ChildPlan plan;
  plan.program = "/bin/sh";
  plan.arguments = {"-c", script};
  return plan;
}

ChildEnd end_of(const ChildPlan& plan) {
  auto child = ChildProcess::start(plan);
  EXPECT_TRUE(child.ok()) << child.status().to_string();
  return child.ok() ? child->wait() : ChildEnd{};
}

TEST(ChildProcess, TellsTheExitCode) {
  for (const int code : {0, 1, 2, 3, 4, 5}) {
    const ChildEnd end = end_of(shell("exit " + std::to_string(code)));
    EXPECT_EQ(end.kind, ChildEndKind::kExited);
    EXPECT_EQ(end.exit_code, code);
  }
  const ChildEnd odd = end_of(shell("exit 77"));
  EXPECT_EQ(odd.kind, ChildEndKind::kCrashed);
  EXPECT_EQ(odd.exit_code, 5);
}

TEST(ChildProcess, TellsACrashFromAKill) {
  const ChildEnd crash = end_of(shell("kill -SEGV $$"));
  EXPECT_EQ(crash.kind, ChildEndKind::kCrashed);
  EXPECT_EQ(crash.exit_code, 5);
  EXPECT_EQ(crash.signal, SIGSEGV);
  EXPECT_NE(crash.reason.find("crashed"), std::string::npos);
  const ChildEnd killed = end_of(shell("kill -KILL $$"));
  EXPECT_EQ(killed.kind, ChildEndKind::kKilled);
  EXPECT_EQ(killed.exit_code, 4);
}

TEST(ChildProcess, EndsAtItsProcessorTime) {
  ChildPlan plan = shell("while :; do :; done");
  plan.cpu_seconds = 1;
  const ChildEnd end = end_of(plan);
  EXPECT_EQ(end.kind, ChildEndKind::kCpuTime);
  EXPECT_EQ(end.exit_code, 4);
  EXPECT_NE(end.reason.find("1 s"), std::string::npos);
  EXPECT_GT(end.cpu_seconds, 0.5);
}

TEST(ChildProcess, IsLimitedInMemory) {
  const TestFolder folder;
  ChildPlan plan = shell("ulimit -d; echo $OPENBLAS_NUM_THREADS");
  plan.log = folder / "log";
  plan.memory_bytes = Offset{64} << 20;
  plan.threads = 2;
  EXPECT_EQ(end_of(plan).exit_code, 0);
  const std::string limit =
      limits_memory() ? std::to_string(memory_limit_of(*plan.memory_bytes, 2) / 1024) : "unlimited";
  EXPECT_EQ(read_whole(folder / "log").value_or(""), limit + "\n1\n");
  // A failure of this code, told by a child that was limited, is told with the limit.
  ChildPlan full = shell("echo '{\"failure\":{\"code\":\"out-of-memory\"}}' >&3; exit 4");
  full.memory_bytes = Offset{64} << 20;
  const ChildEnd end = end_of(full);
  EXPECT_EQ(end.kind, ChildEndKind::kMemory);
  EXPECT_EQ(end.exit_code, 4);
  EXPECT_NE(end.reason.find("64 MiB"), std::string::npos) << end.reason;
}

TEST(ChildProcess, HasItsOwnGroupNoInputAndItsLog) {
  const TestFolder folder;
  ChildPlan plan = shell(
      "cat; echo out; echo err >&2; ps -o pgid= -p $$ 2>/dev/null || true; cat /proc/self/oom_score_adj; "
      "pwd; ulimit -c");
  plan.log = folder / "log";
  plan.working_folder = folder.path();
  EXPECT_EQ(end_of(plan).exit_code, 0);
  const std::string log = read_whole(folder / "log").value_or("");
  EXPECT_EQ(log.rfind("out\nerr\n", 0), 0U) << log;
  EXPECT_NE(log.find("\n1000\n"), std::string::npos) << log;
  EXPECT_NE(log.find(folder.path()), std::string::npos) << log;
}

TEST(ChildProcess, InheritsNoOtherHandle) {
  const TestFolder folder;
  const int leaked = ::dup(1);  // not closed on exec
  ChildPlan plan = shell("ls /proc/self/fd");
  plan.log = folder / "log";
  EXPECT_EQ(end_of(plan).exit_code, 0);
  ::close(leaked);
  // 0 to 2, the progress pipe, and the one by which ls reads the folder.
  EXPECT_EQ(read_whole(folder / "log").value_or(""), "0\n1\n2\n3\n4\n");
}

TEST(ChildProcess, ReadsProgressAndTheFailure) {
  ChildPlan plan = shell(
      "echo '{\"phase\":\"factor\",\"done\":0.25,\"total\":1}' >&3; echo nonsense >&3; "
      "echo "
      "'{\"failure\":{\"kind\":\"bad_input\",\"code\":\"file-not-found\",\"message\":\"no\",\"place\":\"K\","
      "\"remedy\":\"r\"}}' >&3; exit 2");
  auto child = ChildProcess::start(plan);
  ASSERT_TRUE(child.ok());
  std::vector<ChildProgress> seen;
  while (!child->poll()) {
    pollfd handles[] = {{child->end_handle(), POLLIN, 0}, {child->progress_handle(), POLLIN, 0}};
    ASSERT_GT(::poll(handles, 2, 60'000), 0);
    for (auto& line : child->progress()) seen.push_back(line);
  }
  for (auto& line : child->progress()) seen.push_back(line);
  ASSERT_EQ(seen.size(), 1U);
  EXPECT_EQ(seen[0].phase, "factor");
  EXPECT_EQ(seen[0].done, 0.25);
  const ChildEnd end = *child->poll();
  EXPECT_EQ(end.exit_code, 2);
  ASSERT_TRUE(end.failure);
  EXPECT_EQ(end.failure->code, "file-not-found");
  EXPECT_EQ(end.reason, "no");
}

TEST(ChildProcess, StopsOnRequest) {
  auto child = ChildProcess::start(shell("echo '{}' >&3; exec sleep 600"));
  ASSERT_TRUE(child.ok());
  EXPECT_FALSE(child->poll());
  child->stop();
  const ChildEnd end = child->wait();
  EXPECT_EQ(end.kind, ChildEndKind::kStopped);
  EXPECT_EQ(end.exit_code, 130);
}

TEST(ChildProcess, GoesWhenItsObjectGoes) {
  pid_t pid = -1;
  {
    auto child = ChildProcess::start(shell("exec sleep 600"));
    ASSERT_TRUE(child.ok());
    pid = child->pid();
    ChildProcess moved = std::move(*child);
    EXPECT_EQ(moved.pid(), pid);
  }
  EXPECT_EQ(::kill(pid, 0), -1);
  EXPECT_EQ(errno, ESRCH);
}

TEST(ChildProcess, GoesWithItsParent) {
  // The parent is killed outright; its child must not live on.
  int ends[2];
  ASSERT_EQ(::pipe(ends), 0);
  const pid_t parent = ::fork();
  if (parent == 0) {
    auto child = ChildProcess::start(shell("exec sleep 600"));
    const pid_t pid = child.ok() ? child->pid() : -1;
    if (::write(ends[1], &pid, sizeof pid) != sizeof pid) ::_exit(1);
    ::pause();
    ::_exit(0);
  }
  pid_t grandchild = -1;
  ASSERT_EQ(::read(ends[0], &grandchild, sizeof grandchild), static_cast<ssize_t>(sizeof grandchild));
  ASSERT_GT(grandchild, 0);
  ::kill(parent, SIGKILL);
  ::waitpid(parent, nullptr, 0);
  bool gone = false;
  for (int tries = 0; tries < 600 && !gone; ++tries) {
    std::ifstream stat("/proc/" + std::to_string(grandchild) + "/stat");
    std::string pid, name, state;
    gone = !(stat >> pid >> name >> state) || state == "Z";  // a zombie waits for whoever adopts it
    if (!gone) ::usleep(50'000);
  }
  EXPECT_TRUE(gone);
  ::close(ends[0]);
  ::close(ends[1]);
}

TEST(ChildProcess, SaysWhatCannotBeStarted) {
  ChildPlan plan;
  plan.program = "/no/such/program";
  const auto child = ChildProcess::start(plan);
  ASSERT_FALSE(child.ok());
  EXPECT_EQ(child.status().code(), "cannot-start");
  EXPECT_NE(child.status().message().find("/no/such/program"), std::string::npos);
  ChildPlan no_log = shell("exit 0");
  no_log.log = "/no/such/folder/log";
  EXPECT_FALSE(ChildProcess::start(no_log).ok());
}

TEST(ChildProcess, LeavesNoHandleBehind) {
  const auto handles = [] {
    int count = 0;
    for (int handle = 0; handle < 256; ++handle) count += ::fcntl(handle, F_GETFD) >= 0 ? 1 : 0;
    return count;
  };
  const int before = handles();
  for (int k = 0; k < 20; ++k) EXPECT_EQ(end_of(shell("exit 0")).exit_code, 0);
  EXPECT_EQ(handles(), before);
}

}  // namespace
}  // namespace stanchion
