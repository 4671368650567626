// How often a job is tried, with programs that fail in known ways in place of ours.
#include "jobs/batch.hpp"

#include <gtest/gtest.h>
#include <sys/stat.h>

#include <algorithm>

#include "jobs/durable_file.hpp"
#include "jobs/folder.hpp"

namespace stanchion {
namespace {

RequestRules rules() {
  CommandTable check, forecast;
  check.name = "check";
  check.requestable = true;
  check.options = {{"K", "stiffness", "FILE", "", "", OptionKind::kPositional, OptionUse::kInput, true}};
  forecast = check;
  forecast.name = "forecast";
  return {{check, forecast}, {}};
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
