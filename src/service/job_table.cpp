#include "service/job_table.hpp"

#include <fmt/format.h>

#include <nlohmann/json.hpp>

namespace stanchion::service {
namespace {

constexpr const char* kColumns =
    "number, id, command, title, continues, request, state, created_ms, started_ms, finished_ms, attempts, "
    "cancel_wanted, memory_bytes, forecast_bytes, forecast_seconds, exit_code, headline, problem, files, "
    "idempotency_key, request_digest, lost";

/// Each step turns the tables of version k into those of version k + 1; never changed once released.
constexpr const char* kSteps[kSchemaVersion] = {
    R"(CREATE TABLE jobs (
         number INTEGER PRIMARY KEY AUTOINCREMENT,
         id TEXT NOT NULL UNIQUE,
         command TEXT NOT NULL,
         title TEXT,
         request TEXT NOT NULL,
         state TEXT NOT NULL,
         created_ms INTEGER NOT NULL,
         started_ms INTEGER,
         finished_ms INTEGER,
         attempts INTEGER NOT NULL DEFAULT 0,
         cancel_wanted INTEGER NOT NULL DEFAULT 0,
         memory_bytes INTEGER,
         forecast_bytes INTEGER,
         forecast_seconds REAL,
         exit_code INTEGER,
         headline TEXT,
         problem TEXT,
         files TEXT NOT NULL DEFAULT '');
       CREATE INDEX jobs_by_state ON jobs (state, number);
       CREATE TABLE inputs (
         digest TEXT PRIMARY KEY,
         bytes INTEGER NOT NULL,
         name TEXT,
         created_ms INTEGER NOT NULL,
         used_ms INTEGER NOT NULL) WITHOUT ROWID;
       CREATE INDEX inputs_by_use ON inputs (used_ms);
       CREATE TABLE job_inputs (
         job INTEGER NOT NULL REFERENCES jobs (number) ON DELETE CASCADE,
         digest TEXT NOT NULL,
         PRIMARY KEY (job, digest)) WITHOUT ROWID;
       CREATE INDEX job_inputs_by_digest ON job_inputs (digest);)",
    R"(ALTER TABLE jobs ADD COLUMN continues TEXT;
       ALTER TABLE jobs ADD COLUMN idempotency_key TEXT;
       ALTER TABLE jobs ADD COLUMN request_digest TEXT;
       CREATE UNIQUE INDEX jobs_by_key ON jobs (idempotency_key) WHERE idempotency_key IS NOT NULL;
       CREATE INDEX jobs_by_continued ON jobs (continues) WHERE continues IS NOT NULL;)",
    // Until then the attempts before the present one were those that a crash of the service cut short.
    R"(ALTER TABLE jobs ADD COLUMN lost INTEGER NOT NULL DEFAULT 0;
       UPDATE jobs SET lost = max(0, attempts - (state = 'running')) WHERE state IN ('queued', 'running');)",
};

std::string problem_to_json(const JobProblem& problem) {
  const nlohmann::json json = {{"status", problem.status},
                               {"code", problem.code},
                               {"detail", problem.detail},
                               {"place", problem.place},
                               {"remedy", problem.remedy}};
  return json.dump(-1, ' ', false, nlohmann::json::error_handler_t::replace);
}

JobProblem problem_from_json(const std::string& text) {
  const auto json = nlohmann::json::parse(text, nullptr, false);
  if (!json.is_object()) return {500, "internal", text, "", ""};
  return {json.value("status", 500), json.value("code", ""), json.value("detail", ""),
          json.value("place", ""), json.value("remedy", "")};
}

std::vector<std::string> split(const std::string& text) {
  std::vector<std::string> words;
  for (std::size_t begin = 0; begin < text.size();) {
    const std::size_t end = std::min(text.find(' ', begin), text.size());
    words.push_back(text.substr(begin, end - begin));
    begin = end + 1;
  }
  return words;
}

JobRecord record_of(const Statement& row) {
  JobRecord job;
  int k = 0;
  job.number = row.whole(k++);
  job.id = row.text(k++);
  job.command = row.text(k++);
  job.title = row.maybe_text(k++);
  job.continues = row.maybe_text(k++);
  job.request = row.text(k++);
  job.state = job_state_of(row.text(k++)).value_or(JobState::kFailed);
  job.created_ms = row.whole(k++);
  job.started_ms = row.maybe_whole(k++);
  job.finished_ms = row.maybe_whole(k++);
  job.attempts = static_cast<int>(row.whole(k++));
  job.cancel_wanted = row.whole(k++) != 0;
  job.memory_bytes = row.maybe_whole(k++);
  job.forecast_bytes = row.maybe_whole(k++);
  job.forecast_seconds = row.maybe_real(k++);
  if (const auto code = row.maybe_whole(k++)) job.exit_code = static_cast<int>(*code);
  job.headline = row.maybe_text(k++);
  if (const auto problem = row.maybe_text(k++)) job.problem = problem_from_json(*problem);
  job.files = split(row.text(k++));
  job.idempotency_key = row.maybe_text(k++);
  job.request_digest = row.maybe_text(k++);
  job.lost = static_cast<int>(row.whole(k++));
  return job;
}

std::optional<JobRecord> one_job(Statement& statement) {
  if (!statement.step()) return std::nullopt;
  JobRecord job = record_of(statement);
  statement.reset();
  return job;
}

/// What is wanted, as text for LIKE with its special characters defused.
std::string like(const std::string& text) {
  std::string pattern = "%";
  for (const char c : text) {
    if (c == '%' || c == '_' || c == '\\') pattern += '\\';
    pattern += c;
  }
  return pattern + "%";
}

std::string condition_of(const JobFilter& filter) {
  std::string condition = "1";
  if (filter.state) condition += " AND state = ?";
  if (filter.command) condition += " AND command = ?";
  if (filter.continues) condition += " AND continues = ?";
  if (filter.search) {
    condition +=
        " AND (id LIKE ? ESCAPE '\\' OR ifnull(title, '') LIKE ? ESCAPE '\\' OR "
        "ifnull(headline, '') LIKE ? ESCAPE '\\')";
  }
  return condition;
}

void bind_filter(Statement& statement, const JobFilter& filter) {
  if (filter.state) statement.bind(name_of(*filter.state));
  if (filter.command) statement.bind(std::string_view(*filter.command));
  if (filter.continues) statement.bind(std::string_view(*filter.continues));
  for (int k = 0; filter.search && k < 3; ++k) statement.bind(std::string_view(like(*filter.search)));
}

constexpr const char* kNeeded =
    "EXISTS (SELECT 1 FROM job_inputs JOIN jobs ON jobs.number = job_inputs.job "
    "WHERE job_inputs.digest = inputs.digest AND jobs.state IN ('queued', 'running'))";

InputRecord input_of(const Statement& row) {
  return {row.text(0), row.whole(1), row.whole(3), row.whole(4), row.maybe_text(2), row.whole(5) != 0};
}

const std::string kInputColumns = fmt::format("digest, bytes, name, created_ms, used_ms, {}", kNeeded);

std::vector<InputRecord> inputs_of(Statement statement) {
  std::vector<InputRecord> inputs;
  while (statement.step()) inputs.push_back(input_of(statement));
  return inputs;
}

}  // namespace

const char* name_of(JobState state) {
  switch (state) {
    case JobState::kQueued:
      return "queued";
    case JobState::kRunning:
      return "running";
    case JobState::kDone:
      return "done";
    case JobState::kFailed:
      return "failed";
    case JobState::kCancelled:
      return "cancelled";
  }
  return "";
}

std::optional<JobState> job_state_of(const std::string& name) {
  for (const JobState state :
       {JobState::kQueued, JobState::kRunning, JobState::kDone, JobState::kFailed, JobState::kCancelled}) {
    if (name == name_of(state)) return state;
  }
  return std::nullopt;
}

void migrate(Database& database) {
  database.execute("BEGIN IMMEDIATE");
  auto query = database.statement("PRAGMA user_version");
  query.step();
  const std::int64_t version = query.whole(0);
  query.reset();
  if (version > kSchemaVersion) {
    database.execute("ROLLBACK");
    throw DatabaseError(
        fmt::format("the job store: version {} is of a later program, this one writes version {}", version,
                    kSchemaVersion),
        false);
  }
  for (std::int64_t k = version; k < kSchemaVersion; ++k) database.execute(kSteps[k]);
  database.execute(fmt::format("PRAGMA user_version = {}; COMMIT", kSchemaVersion));
}

bool JobTable::insert(JobRecord& job) {
  auto statement = database_.statement(
      "INSERT OR IGNORE INTO jobs (id, command, title, continues, request, state, created_ms, memory_bytes, "
      "idempotency_key, request_digest) VALUES (?, ?, ?, ?, ?, 'queued', ?, ?, ?, ?)");
  statement.bind(std::string_view(job.id)).bind(std::string_view(job.command));
  const auto bind_text = [&statement](const std::optional<std::string>& text) {
    text ? statement.bind(std::string_view(*text)) : statement.bind_null();
  };
  bind_text(job.title);
  bind_text(job.continues);
  statement.bind(std::string_view(job.request)).bind(job.created_ms).bind(job.memory_bytes);
  bind_text(job.idempotency_key);
  bind_text(job.request_digest);
  if (statement.run() == 0) return false;
  job.number = database_.last_row();
  for (const std::string& digest : job.inputs) {
    database_.statement("INSERT OR IGNORE INTO job_inputs (job, digest) VALUES (?, ?)")
        .bind(job.number)
        .bind(std::string_view(digest))
        .run();
    use_input(digest, job.created_ms);
  }
  return true;
}

std::optional<JobRecord> JobTable::find(const std::string& id) {
  auto statement = database_.statement(fmt::format("SELECT {} FROM jobs WHERE id = ?", kColumns));
  statement.bind(std::string_view(id));
  return one_job(statement);
}

std::optional<JobRecord> JobTable::find(std::int64_t number) {
  auto statement = database_.statement(fmt::format("SELECT {} FROM jobs WHERE number = ?", kColumns));
  statement.bind(number);
  return one_job(statement);
}

std::optional<JobRecord> JobTable::find_by_key(const std::string& idempotency_key) {
  auto statement =
      database_.statement(fmt::format("SELECT {} FROM jobs WHERE idempotency_key = ?", kColumns));
  statement.bind(std::string_view(idempotency_key));
  return one_job(statement);
}

JobPage JobTable::list(const JobFilter& filter, int limit, std::optional<std::int64_t> before) {
  JobPage page;
  const std::string condition = condition_of(filter);
  auto count = database_.statement("SELECT count(*) FROM jobs WHERE " + condition);
  bind_filter(count, filter);
  count.step();
  page.total = count.whole(0);
  auto statement = database_.statement(fmt::format(
      "SELECT {} FROM jobs WHERE {} AND number < ? ORDER BY number DESC LIMIT ?", kColumns, condition));
  bind_filter(statement, filter);
  statement.bind(before.value_or(INT64_MAX)).bind(std::int64_t{limit} + 1);
  while (statement.step()) {
    if (page.jobs.size() == static_cast<std::size_t>(limit)) {
      page.next = page.jobs.back().number;
      break;
    }
    page.jobs.push_back(record_of(statement));
  }
  return page;
}

std::vector<std::int64_t> JobTable::queued() {
  std::vector<std::int64_t> numbers;
  auto statement = database_.statement("SELECT number FROM jobs WHERE state = 'queued' ORDER BY number");
  while (statement.step()) numbers.push_back(statement.whole(0));
  return numbers;
}

std::vector<std::pair<std::string, std::int64_t>> JobTable::count_by_state() {
  std::vector<std::pair<std::string, std::int64_t>> counts;
  auto statement = database_.statement("SELECT state, count(*) FROM jobs GROUP BY state");
  while (statement.step()) counts.emplace_back(statement.text(0), statement.whole(1));
  return counts;
}

bool JobTable::begin(const JobRecord& job) {
  return database_
             .statement(
                 "UPDATE jobs SET state = 'running', attempts = attempts + 1, started_ms = ?, memory_bytes = "
                 "?, "
                 "forecast_bytes = ?, forecast_seconds = ? WHERE number = ? AND state = 'queued'")
             .bind(job.started_ms)
             .bind(job.memory_bytes)
             .bind(job.forecast_bytes)
             .bind(job.forecast_seconds)
             .bind(job.number)
             .run() == 1;
}

bool JobTable::end(const JobRecord& job) {
  auto statement = database_.statement(
      "UPDATE jobs SET state = ?, finished_ms = ?, memory_bytes = ?, forecast_bytes = ?, forecast_seconds = "
      "?, "
      "files = ?, exit_code = ?, headline = ?, problem = ? WHERE number = ? AND state = 'running'");
  statement.bind(name_of(job.state))
      .bind(job.finished_ms)
      .bind(job.memory_bytes)
      .bind(job.forecast_bytes)
      .bind(job.forecast_seconds)
      .bind(std::string_view(fmt::format("{}", fmt::join(job.files, " "))));
  job.exit_code ? statement.bind(std::int64_t{*job.exit_code}) : statement.bind_null();
  job.headline ? statement.bind(std::string_view(*job.headline)) : statement.bind_null();
  job.problem ? statement.bind(std::string_view(problem_to_json(*job.problem))) : statement.bind_null();
  return statement.bind(job.number).run() == 1;
}

bool JobTable::cancel_queued(const std::string& id, std::int64_t now_ms) {
  return database_
             .statement(
                 "UPDATE jobs SET state = 'cancelled', finished_ms = ?, cancel_wanted = 1 WHERE id = ? AND "
                 "state = 'queued'")
             .bind(now_ms)
             .bind(std::string_view(id))
             .run() == 1;
}

bool JobTable::want_cancel(const std::string& id) {
  return database_.statement("UPDATE jobs SET cancel_wanted = 1 WHERE id = ? AND state = 'running'")
             .bind(std::string_view(id))
             .run() == 1;
}

bool JobTable::put_back(std::int64_t number) {
  return database_
             .statement(
                 "UPDATE jobs SET state = 'queued', attempts = attempts - 1, started_ms = NULL WHERE "
                 "number = ? AND state = 'running'")
             .bind(number)
             .run() == 1;
}

bool JobTable::try_again(std::int64_t number, bool lost) {
  return database_
             .statement(
                 "UPDATE jobs SET state = 'queued', lost = lost + ?, started_ms = NULL WHERE number = ? AND "
                 "state = 'running' AND NOT cancel_wanted")
             .bind(std::int64_t{lost ? 1 : 0})
             .bind(number)
             .run() == 1;
}

bool JobTable::remove(const std::string& id) {
  return database_.statement("DELETE FROM jobs WHERE id = ? AND state NOT IN ('queued', 'running')")
             .bind(std::string_view(id))
             .run() == 1;
}

std::vector<std::string> JobTable::remove_old(std::int64_t kept, std::int64_t most) {
  std::vector<std::string> ids;
  auto statement = database_.statement(
      "SELECT id FROM jobs WHERE state NOT IN ('queued', 'running') ORDER BY number LIMIT max(0, min(?, "
      "(SELECT count(*) FROM jobs WHERE state NOT IN ('queued', 'running')) - ?))");
  statement.bind(most).bind(kept);
  while (statement.step()) ids.push_back(statement.text(0));
  for (const std::string& id : ids) remove(id);
  return ids;
}

void JobTable::recover(std::int64_t now_ms) {
  const JobProblem twice{500, "interrupted-twice",
                         "it was cut short twice, this time by the end of the service", "",
                         "submit it again; if it ends the service, please report it"};
  database_
      .statement(
          "UPDATE jobs SET state = 'cancelled', finished_ms = ? WHERE state = 'running' AND cancel_wanted")
      .bind(now_ms)
      .run();
  database_
      .statement(
          "UPDATE jobs SET state = 'failed', finished_ms = ?, exit_code = 5, problem = ? WHERE "
          "state = 'running' AND lost >= 1")
      .bind(now_ms)
      .bind(std::string_view(problem_to_json(twice)))
      .run();
  database_
      .statement(
          "UPDATE jobs SET state = 'queued', lost = lost + 1, started_ms = NULL WHERE state = 'running'")
      .run();
}

void JobTable::touch() {
  database_.execute(fmt::format("PRAGMA user_version = {}", kSchemaVersion));
}

void JobTable::put_input(const InputRecord& input) {
  auto statement = database_.statement(
      "INSERT INTO inputs (digest, bytes, name, created_ms, used_ms) VALUES (?, ?, ?, ?, ?) "
      "ON CONFLICT (digest) DO UPDATE SET used_ms = excluded.used_ms, name = ifnull(excluded.name, name)");
  statement.bind(std::string_view(input.digest)).bind(input.bytes);
  input.name ? statement.bind(std::string_view(*input.name)) : statement.bind_null();
  statement.bind(input.created_ms).bind(input.used_ms).run();
}

std::optional<InputRecord> JobTable::find_input(const std::string& digest) {
  auto statement = database_.statement(fmt::format("SELECT {} FROM inputs WHERE digest = ?", kInputColumns));
  statement.bind(std::string_view(digest));
  if (!statement.step()) return std::nullopt;
  return input_of(statement);
}

void JobTable::use_input(const std::string& digest, std::int64_t now_ms) {
  database_.statement("UPDATE inputs SET used_ms = ? WHERE digest = ?")
      .bind(now_ms)
      .bind(std::string_view(digest))
      .run();
}

bool JobTable::remove_input(const std::string& digest) {
  return database_.statement(fmt::format("DELETE FROM inputs WHERE digest = ? AND NOT {}", kNeeded))
             .bind(std::string_view(digest))
             .run() == 1;
}

std::vector<InputRecord> JobTable::list_inputs(int limit, std::int64_t offset) {
  auto statement = database_.statement(
      fmt::format("SELECT {} FROM inputs ORDER BY used_ms DESC, digest LIMIT ? OFFSET ?", kInputColumns));
  statement.bind(std::int64_t{limit}).bind(offset);
  return inputs_of(std::move(statement));
}

std::int64_t JobTable::count_inputs() {
  auto statement = database_.statement("SELECT count(*) FROM inputs");
  statement.step();
  return statement.whole(0);
}

std::int64_t JobTable::input_bytes() {
  auto statement = database_.statement("SELECT ifnull(sum(bytes), 0) FROM inputs");
  statement.step();
  return statement.whole(0);
}

std::vector<InputRecord> JobTable::evictable_inputs(int limit) {
  auto statement = database_.statement(fmt::format(
      "SELECT {} FROM inputs WHERE NOT {} ORDER BY used_ms, digest LIMIT ?", kInputColumns, kNeeded));
  statement.bind(std::int64_t{limit});
  return inputs_of(std::move(statement));
}

}  // namespace stanchion::service
