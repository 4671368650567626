// How often a job is tried, with programs that fail in known ways in place of ours.
#include "jobs/batch.hpp"

#include <gtest/gtest.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <thread>

#include "base/clock.hpp"
#include "jobs/durable_file.hpp"
#include "jobs/folder.hpp"

namespace stanchion {
namespace {

RequestRules rules() {
  CommandTable check, forecast;
  check.name = "check";
  check.requestable = true;
  check.options = {{"K", "stiffness", "FILE", "", "", OptionKind::kPositional, OptionUse::kInput, true},
                   {"--mass", "mass", "FILE", "", "", OptionKind::kText, OptionUse::kInput}};
  forecast = check;
  forecast.name = "forecast";
  return {{check, forecast}, {}};
}

/// What came of jobs that a shell script works on.
struct Worked {
  Status status;
  std::vector<JobResult> recorded;
  std::vector<std::string> log;  ///< "id: words"
};

Worked work(const TestFolder& folder, const std::string& script, const std::string& jobs,
            const CancellationToken* cancel = nullptr) {
  const std::string program = folder.write("program", "#!/bin/sh\ncd '" + folder.path() + "'\n" + script);
  EXPECT_EQ(::chmod(program.c_str(), 0755), 0);
  const auto listed = read_job_list(jobs, "jobs", folder.path(), rules());
  if (!listed.ok()) return {listed.status(), {}, {}};
  std::vector<const ListedJob*> pointers;
  for (const ListedJob& job : *listed) pointers.push_back(&job);
  auto results = ResultFile::open(folder / "results.jsonl");
  EXPECT_TRUE(results.ok());
  BatchOptions options;
  options.program = program;
  options.work_folder = folder / "work";
  options.memory_cap = Offset{1} << 36;
  Worked worked;
  BatchContext context;
  context.cancel = cancel;
  context.log = [&worked](const std::string& id, const std::string& text) {
    worked.log.push_back(id + ": " + text);
  };
  FileDigests files;
  worked.status = run_batch(pointers, rules(), options, context, files, *results, worked.recorded);
  return worked;
}

std::string check_of(const std::string& id, const std::string& file) {
  return R"({"id": ")" + id + R"(", "command": "check", "inputs": {"stiffness": ")" + file + "\"}}\n";
}

/// A file of many zeros that take no room.
void make_large(const std::string& path, Offset bytes) {
  std::ofstream(path).close();
  ASSERT_EQ(::truncate(path.c_str(), bytes), 0);
}

struct Tried {
  JobResult result;
  std::ptrdiff_t runs = 0;
};

/// Runs one job by a shell script and counts how often it is started.
Tried tried(const std::string& script, Offset memory_cap) {
  const TestFolder folder;
  folder.write("K.mtx", "some bytes");
  const std::string program =
      folder.write("program", "#!/bin/sh\necho x >> '" + (folder / "runs") + "'\n" + script);
  EXPECT_EQ(::chmod(program.c_str(), 0755), 0);
  const auto jobs = read_job_list(R"({"id": "a", "command": "check", "inputs": {"stiffness": "K.mtx"}})",
                                  "jobs", folder.path(), rules());
  EXPECT_TRUE(jobs.ok()) << jobs.status().message();
  auto results = ResultFile::open(folder / "results.jsonl");
  EXPECT_TRUE(results.ok());
  BatchOptions options;
  options.program = program;
  options.work_folder = folder / "work";
  options.memory_cap = memory_cap;
  FileDigests files;
  std::vector<JobResult> recorded;
  const Status status = run_batch({&jobs->front()}, rules(), options, {}, files, *results, recorded);
  EXPECT_TRUE(status.ok()) << status.message();
  EXPECT_EQ(recorded.size(), 1U);
  const std::string runs = read_whole(folder / "runs").value_or("");
  return {recorded.front(), std::count(runs.begin(), runs.end(), '\n')};
}

constexpr Offset kGibi = Offset{1} << 30;
/// Answers whatever was asked.
const std::string kAnswer =
    "for word; do case $word in --json=*) echo '{}' > \"${word#--json=}\";; esac; done\n";

TEST(Batch, ALargeInputThatIsReadHoldsUpNoOtherJob) {
  const TestFolder folder;
  make_large(folder / "large.mtx", kGibi / 2);
  folder.write("K.mtx", "some bytes");
  const Worked worked = work(folder, kAnswer, check_of("large", "large.mtx") + check_of("small", "K.mtx"));
  EXPECT_TRUE(worked.status.ok());
  ASSERT_EQ(worked.recorded.size(), 2U);
  EXPECT_EQ(worked.recorded[0].id, "small");
  const auto of = [&worked](const std::string& front) {
    return std::find_if(worked.log.begin(), worked.log.end(),
                        [&front](const std::string& line) { return line.rfind(front, 0) == 0; });
  };
  EXPECT_LT(of("small: recorded"), of("large: ")) << "the small one has ended before the large one begins";
  EXPECT_NE(of("large: recorded, exit code 0"), worked.log.end());
}

TEST(Batch, AnInterruptionDoesNotWaitForALargeInput) {
  const TestFolder folder;
  make_large(folder / "large.mtx", 1024 * kGibi);
  CancellationToken cancel;
  std::thread other([&cancel] {
    std::this_thread::sleep_for(std::chrono::milliseconds(100));
    cancel.cancel();
  });
  const Stopwatch watch;
  const Worked worked = work(folder, kAnswer, check_of("large", "large.mtx"), &cancel);
  other.join();
  EXPECT_EQ(worked.status.kind(), StatusKind::kInterrupted);
  EXPECT_TRUE(worked.recorded.empty());
  EXPECT_LT(watch.seconds(), 60);  // reading it all takes ten minutes or more
}

/// The job that began first.
std::string first_begun(const Worked& worked) {
  for (const std::string& line : worked.log) {
    const std::size_t words = line.find(": job started");
    if (words != std::string::npos) return line.substr(0, words);
  }
  return "";
}

TEST(Batch, AnInputThatChangesWhileOthersOfItsJobAreReadIsReadAgain) {
  // The second job's L.mtx is read, then for a while its large input; meanwhile the first job changes L.mtx.
  const TestFolder folder;
  folder.write("K.mtx", "some bytes");
  folder.write("L.mtx", "as long as the first job has not ended");
  make_large(folder / "large.mtx", kGibi / 5);
  const std::string second =
      R"({"id": "second", "command": "check", "inputs": {"stiffness": "L.mtx", "mass": "large.mtx"}})"
      "\n";
  const Worked worked = work(folder, kAnswer + "case $* in *K.mtx*) sleep 0.1; echo changed > L.mtx;; esac\n",
                             check_of("first", "K.mtx") + second);
  ASSERT_EQ(worked.recorded.size(), 2U);
  EXPECT_EQ(first_begun(worked), "first");
  for (const JobResult& result : worked.recorded) EXPECT_EQ(result.exit_code, 0) << result.reason;
}

TEST(Batch, AnInputThatChangesBeforeItsJobIsReadAgain) {
  // One processor: a job begins when the other has ended. Which one is first depends on whose digest is there
  // first.
  for (int round = 0; round < 10; ++round) {
    const TestFolder folder;
    folder.write("K.mtx", "some bytes");
    folder.write("L.mtx", "as long as the first job has not ended");
    const std::string jobs = check_of("first", "K.mtx") + check_of("second", "L.mtx");
    const Worked worked = work(folder, kAnswer + "case $* in *K.mtx*) echo changed > L.mtx;; esac\n", jobs);
    ASSERT_EQ(worked.recorded.size(), 2U);
    // The second, had it begun first, may end as one whose input changed before its result was recorded.
    if (first_begun(worked) != "first") continue;
    EXPECT_EQ(worked.recorded[0].id, "first");
    for (const JobResult& result : worked.recorded) EXPECT_EQ(result.exit_code, 0) << result.reason;
    const auto listed = read_job_list(jobs, "jobs", folder.path(), rules());
    FileDigests files;
    ASSERT_TRUE(worked.recorded[1].digest);
    EXPECT_EQ(*digest_of((*listed)[1].request, files), *worked.recorded[1].digest);
    return;
  }
  FAIL() << "the second job began first ten times";
}

/// One job, which does `more` to its input K.mtx while it runs.
Worked work_that(const std::string& more) {
  const TestFolder folder;
  folder.write("K.mtx", "some bytes");
  return work(folder, kAnswer + more, check_of("a", "K.mtx"));
}

TEST(Batch, AnInputThatChangesWhileItsJobRunsSpoilsTheResult) {
  const Worked worked = work_that("echo changed > K.mtx\n");
  ASSERT_EQ(worked.recorded.size(), 1U);
  EXPECT_EQ(worked.recorded[0].exit_code, 2);
  EXPECT_EQ(worked.recorded[0].reason, "an input changed while the job ran");
  EXPECT_FALSE(worked.recorded[0].digest);
}

TEST(Batch, AnInputThatIsTouchedWhileItsJobRunsIsTheSame) {
  const Worked worked = work_that("touch -d 2001-01-01 K.mtx\n");
  ASSERT_EQ(worked.recorded.size(), 1U);
  EXPECT_EQ(worked.recorded[0].exit_code, 0);
  EXPECT_TRUE(worked.recorded[0].digest);
}

TEST(Batch, AJobThatAbortsIsTriedOnceMoreWithAllTheMemory) {
  const Tried job = tried("kill -ABRT $$", 64 * kGibi);
  EXPECT_EQ(job.runs, 2);
  EXPECT_EQ(job.result.attempts, 2);
  EXPECT_EQ(job.result.exit_code, 5);
  EXPECT_NE(job.result.reason.find("crashed"), std::string::npos) << job.result.reason;
}

TEST(Batch, AJobThatCrashesIsNotTriedAgain) {
  EXPECT_EQ(tried("kill -SEGV $$", 64 * kGibi).runs, 1);
}

TEST(Batch, AJobShortOfMemoryGetsTwiceAsMuchUpToTheCap) {
  const std::string short_of_memory =
      R"(echo '{"failure": {"kind": "resource_limit", "code": "out-of-memory", "message": "", "place": "", "remedy": ""}}' >&3
exit 4)";
  const Tried job = tried(short_of_memory, 1024 * kGibi);
  EXPECT_EQ(job.runs, 6);
  EXPECT_EQ(job.result.exit_code, 4);
  EXPECT_EQ(tried(short_of_memory, kGibi / 64).runs, 1);  // it had all there is
}

TEST(Batch, AJobThatIsKilledIsTriedOnceMore) {
  EXPECT_EQ(tried("kill -KILL $$", 64 * kGibi).runs, 2);
}

}  // namespace
}  // namespace stanchion
