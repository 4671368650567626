// The job store: migration of an old database, transitions, recovery after a crash, one transaction for many.
#include <gtest/gtest.h>

#include <chrono>
#include <filesystem>
#include <future>
#include <thread>

#include "io/temp_folder.hpp"
#include "service/job_journal.hpp"

namespace stanchion::service {
namespace {

JobRecord job_named(const std::string& id) {
  JobRecord job;
  job.id = id;
  job.command = "check";
  job.request =
      R"({"id":")" + id + R"(","command":"check","inputs":{"stiffness":"models/K.mtx"},"options":{}})";
  job.created_ms = 1000;
  return job;
}

class Store : public ::testing::Test {
 protected:
  std::string path() const { return folder_.path("jobs.sqlite"); }
  stanchion::testing::TempFolder folder_;
};

/// As version 1 of the tables was written; never to be changed.
constexpr const char* kVersionOne = R"(
  CREATE TABLE jobs (
    number INTEGER PRIMARY KEY AUTOINCREMENT, id TEXT NOT NULL UNIQUE, command TEXT NOT NULL, title TEXT,
    request TEXT NOT NULL, state TEXT NOT NULL, created_ms INTEGER NOT NULL, started_ms INTEGER, finished_ms INTEGER,
    attempts INTEGER NOT NULL DEFAULT 0, cancel_wanted INTEGER NOT NULL DEFAULT 0, memory_bytes INTEGER,
    forecast_bytes INTEGER, forecast_seconds REAL, exit_code INTEGER, headline TEXT, problem TEXT,
    files TEXT NOT NULL DEFAULT '');
  CREATE INDEX jobs_by_state ON jobs (state, number);
  CREATE TABLE inputs (digest TEXT PRIMARY KEY, bytes INTEGER NOT NULL, name TEXT, created_ms INTEGER NOT NULL,
    used_ms INTEGER NOT NULL) WITHOUT ROWID;
  CREATE INDEX inputs_by_use ON inputs (used_ms);
  CREATE TABLE job_inputs (job INTEGER NOT NULL REFERENCES jobs (number) ON DELETE CASCADE, digest TEXT NOT NULL,
    PRIMARY KEY (job, digest)) WITHOUT ROWID;
  CREATE INDEX job_inputs_by_digest ON job_inputs (digest);
  INSERT INTO jobs (id, command, title, request, state, created_ms, finished_ms, attempts, exit_code, headline, files)
    VALUES ('old', 'check', 'Before', '{}', 'done', 5, 9, 1, 1, 'It was so.', 'result text');
  INSERT INTO jobs (id, command, request, state, created_ms) VALUES ('waits', 'count', '{}', 'queued', 6);
  INSERT INTO inputs VALUES ('aa', 10, 'K.mtx', 1, 2);
  INSERT INTO job_inputs VALUES (2, 'aa');
  PRAGMA user_version = 1;)";

TEST_F(Store, AnOldDatabaseKeepsItsJobs) {
  { Database(path()).execute(kVersionOne); }
  auto journal = JobJournal::open(path());
  ASSERT_TRUE(journal.ok()) << journal.status().to_string();
  ASSERT_TRUE((*journal)
                  ->write([](JobTable& table) {
                    const auto old = table.find("old");
                    ASSERT_TRUE(old);
                    EXPECT_EQ(old->state, JobState::kDone);
                    EXPECT_EQ(old->title, "Before");
                    EXPECT_EQ(old->headline, "It was so.");
                    EXPECT_EQ(old->exit_code, 1);
                    EXPECT_EQ(old->files, (std::vector<std::string>{"result", "text"}));
                    EXPECT_FALSE(old->continues || old->idempotency_key);
                    EXPECT_EQ(table.queued(), std::vector<std::int64_t>{2});
                    EXPECT_FALSE(table.remove_input("aa"));  // the waiting job needs it
                    JobRecord job = job_named("new");
                    job.continues = "old";
                    job.idempotency_key = "key";
                    EXPECT_TRUE(table.insert(job));
                    EXPECT_EQ(table.find_by_key("key")->continues, "old");
                  })
                  .ok());
  journal->reset();
  Database again(path());
  auto version = again.statement("PRAGMA user_version");
  ASSERT_TRUE(version.step());
  EXPECT_EQ(version.whole(0), kSchemaVersion);
}

/// What version 2 added.
constexpr const char* kVersionTwo = R"(
  ALTER TABLE jobs ADD COLUMN continues TEXT;
  ALTER TABLE jobs ADD COLUMN idempotency_key TEXT;
  ALTER TABLE jobs ADD COLUMN request_digest TEXT;
  INSERT INTO jobs (id, command, request, state, created_ms, attempts) VALUES
    ('first', 'check', '{}', 'running', 7, 1), ('second', 'check', '{}', 'running', 8, 2),
    ('again', 'check', '{}', 'queued', 9, 1);
  PRAGMA user_version = 2;)";

TEST_F(Store, WhatACrashCostBeforeStaysKnown) {
  Database database(path());
  database.execute(kVersionOne);
  database.execute(kVersionTwo);
  migrate(database);
  JobTable table(database);
  EXPECT_EQ(table.find("first")->lost, 0);
  EXPECT_EQ(table.find("second")->lost, 1);
  EXPECT_EQ(table.find("again")->lost, 1);
  EXPECT_EQ(table.find("waits")->lost, 0);
  table.recover(50);
  EXPECT_EQ(table.find("first")->state, JobState::kQueued);
  EXPECT_EQ(table.find("second")->state, JobState::kFailed);
}

TEST_F(Store, ADatabaseOfALaterProgramIsLeftAlone) {
  { Database(path()).execute("PRAGMA user_version = 99"); }
  const auto journal = JobJournal::open(path());
  ASSERT_FALSE(journal.ok());
  EXPECT_NE(journal.status().message().find("version 99"), std::string::npos);
}

TEST_F(Store, WritesReachTheDiskBeforeTheyAreAcknowledged) {
  Database database(path());
  auto mode = database.statement("PRAGMA journal_mode");
  ASSERT_TRUE(mode.step());
  EXPECT_EQ(mode.text(0), "wal");
  auto wait = database.statement("PRAGMA synchronous");
  ASSERT_TRUE(wait.step());
  EXPECT_EQ(wait.whole(0), 2);  // FULL
}

TEST_F(Store, EachJobEndsOnce) {
  Database database(path());
  migrate(database);
  JobTable table(database);
  JobRecord job = job_named("one");
  ASSERT_TRUE(table.insert(job));
  JobRecord same = job_named("one");
  EXPECT_FALSE(table.insert(same));
  EXPECT_FALSE(table.end(job)) << "it has not begun";
  EXPECT_FALSE(table.remove("one")) << "it waits";
  EXPECT_TRUE(table.begin(job));
  EXPECT_FALSE(table.begin(job));
  EXPECT_FALSE(table.cancel_queued("one", 7));
  EXPECT_FALSE(table.remove("one")) << "it runs";
  job.state = JobState::kFailed;
  job.problem = JobProblem{507, "memory-limit", "it was too much \xff", "here", "a larger machine"};
  EXPECT_TRUE(table.end(job));
  job.state = JobState::kDone;
  EXPECT_FALSE(table.end(job)) << "it has ended";
  const auto found = table.find("one");
  EXPECT_EQ(found->state, JobState::kFailed);
  EXPECT_EQ(found->problem->code, "memory-limit");
  EXPECT_EQ(found->attempts, 1);
  EXPECT_TRUE(table.remove("one"));
  EXPECT_FALSE(table.find("one"));
}

TEST_F(Store, ACrashCostsOneAttempt) {
  Database database(path());
  migrate(database);
  JobTable table(database);
  for (const char* id : {"queued", "running", "cancelling", "done"}) {
    JobRecord job = job_named(id);
    ASSERT_TRUE(table.insert(job));
    job.state = JobState::kDone;
    EXPECT_TRUE(job.id == "queued" || table.begin(job));
    EXPECT_TRUE(job.id != "done" || table.end(job));
  }
  ASSERT_TRUE(table.want_cancel("cancelling"));
  table.recover(50);
  EXPECT_EQ(table.find("queued")->state, JobState::kQueued);
  EXPECT_EQ(table.find("running")->state, JobState::kQueued);
  EXPECT_EQ(table.find("running")->attempts, 1);
  EXPECT_EQ(table.find("cancelling")->state, JobState::kCancelled);
  EXPECT_EQ(table.find("done")->state, JobState::kDone);
  ASSERT_TRUE(table.begin(*table.find("running")));
  table.recover(60);
  const auto twice = table.find("running");
  EXPECT_EQ(twice->state, JobState::kFailed);
  EXPECT_EQ(twice->problem->code, "interrupted-twice");
  // An orderly shutdown costs none.
  ASSERT_TRUE(table.begin(*table.find("queued")));
  ASSERT_TRUE(table.put_back(table.find("queued")->number));
  EXPECT_EQ(table.find("queued")->attempts, 0);
}

TEST_F(Store, AnAttemptForWantOfMemoryIsNotLost) {
  Database database(path());
  migrate(database);
  JobTable table(database);
  JobRecord job = job_named("one");
  ASSERT_TRUE(table.insert(job));
  EXPECT_FALSE(table.try_again(job.number, true)) << "it does not run";
  ASSERT_TRUE(table.begin(job));
  EXPECT_TRUE(table.try_again(job.number, false));
  EXPECT_EQ(table.find("one")->state, JobState::kQueued);
  EXPECT_EQ(table.find("one")->attempts, 1);
  ASSERT_TRUE(table.begin(job));
  table.recover(50);
  EXPECT_EQ(table.find("one")->state, JobState::kQueued) << "its first crash";
  ASSERT_TRUE(table.begin(job));
  ASSERT_TRUE(table.want_cancel("one"));
  EXPECT_FALSE(table.try_again(job.number, true)) << "it is to be cancelled";
}

TEST_F(Store, TheOldestEndedJobsGoFirst) {
  Database database(path());
  migrate(database);
  JobTable table(database);
  for (int k = 0; k < 6; ++k) {
    JobRecord job = job_named("j" + std::to_string(k));
    ASSERT_TRUE(table.insert(job));
    if (k == 0) continue;  // still waits
    ASSERT_TRUE(table.begin(job));
    job.state = JobState::kDone;
    ASSERT_TRUE(table.end(job));
  }
  EXPECT_EQ(table.remove_old(3, 100), (std::vector<std::string>{"j1", "j2"}));
  EXPECT_TRUE(table.remove_old(3, 100).empty());
  EXPECT_TRUE(table.find("j0"));
}

TEST_F(Store, ManyChangesAtATimeShareTransactions) {
  auto journal = JobJournal::open(path());
  ASSERT_TRUE(journal.ok());
  constexpr int kThreads = 8, kEach = 40;
  std::vector<std::thread> threads;
  for (int t = 0; t < kThreads; ++t) {
    threads.emplace_back([&, t] {
      for (int k = 0; k < kEach; ++k) {
        JobRecord job = job_named("t" + std::to_string(t) + "-" + std::to_string(k));
        bool inserted = false;
        EXPECT_TRUE((*journal)->write([&](JobTable& table) { inserted = table.insert(job); }).ok());
        EXPECT_TRUE(inserted);
      }
    });
  }
  for (std::thread& thread : threads) thread.join();
  EXPECT_EQ((*journal)->figures().changes, kThreads * kEach);
  std::int64_t total = 0;
  EXPECT_TRUE((*journal)->read([&](JobTable& table) { total = table.list({}, 1, {}).total; }).ok());
  EXPECT_EQ(total, kThreads * kEach);
  const Status failed = (*journal)->write([](JobTable&) { throw DatabaseError("no", true); });
  EXPECT_EQ(failed.code(), "disk-full");
  EXPECT_FALSE((*journal)->figures().healthy);
}

TEST_F(Store, ABadChangeFailsAlone) {
  auto journal = JobJournal::open(path());
  ASSERT_TRUE(journal.ok());
  // While the first one is being written the others gather, and share the next transaction.
  std::promise<void> begun, others;
  std::vector<std::thread> threads;
  threads.emplace_back([&] {
    EXPECT_TRUE((*journal)
                    ->write([&](JobTable&) {
                      begun.set_value();
                      others.get_future().wait();
                    })
                    .ok());
  });
  begun.get_future().wait();
  threads.emplace_back(
      [&] { EXPECT_FALSE((*journal)->write([](JobTable&) { throw std::runtime_error("a defect"); }).ok()); });
  for (const char* id : {"one", "two"}) {
    threads.emplace_back([&, id] {
      JobRecord job = job_named(id);
      bool inserted = false;
      EXPECT_TRUE((*journal)->write([&](JobTable& table) { inserted = table.insert(job); }).ok());
      EXPECT_TRUE(inserted);
    });
  }
  std::this_thread::sleep_for(std::chrono::milliseconds(100));
  others.set_value();
  for (std::thread& thread : threads) thread.join();
  EXPECT_TRUE((*journal)->read([&](JobTable& table) { EXPECT_EQ(table.list({}, 1, {}).total, 2); }).ok());
}

}  // namespace
}  // namespace stanchion::service
