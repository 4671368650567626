// `stanchion serve`: its options, and the service between start and the request to stop.
#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <mutex>
#include <thread>

#include "cli/command.hpp"
#include "cli/interrupt.hpp"
#include "cli/log_file.hpp"
#include "cli/terminal.hpp"
#include "model/byte_size.hpp"
#include "model/version.hpp"
#include "service/service.hpp"

namespace stanchion::cli {
namespace {

namespace fs = std::filesystem;

constexpr std::int64_t kDefaultPort = 8420;

/// Three quarters of what the machine, or the container it runs in, has.
Offset usual_memory() {
  Offset bytes = Offset{::sysconf(_SC_PHYS_PAGES)} * ::sysconf(_SC_PAGESIZE);
  Offset limit = 0;
  if (std::ifstream("/sys/fs/cgroup/memory.max") >> limit && limit > 0) bytes = std::min(bytes, limit);
  return bytes / 4 * 3;
}

/// Where jobs are kept when nothing is said: STANCHION_HOME, or the place the XDG base directories name.
std::string usual_store() {
  const auto set = [](const char* name) -> std::string {
    const char* value = std::getenv(name);
    return value == nullptr ? "" : value;
  };
  if (const std::string home = set("STANCHION_HOME"); !home.empty()) return home;
  if (const std::string data = set("XDG_DATA_HOME"); !data.empty()) return data + "/stanchion";
  if (const std::string home = set("HOME"); !home.empty()) return home + "/.local/share/stanchion";
  return "";
}

/// The installed data beside the program, or the data of the source tree that it was built from.
std::string data_path(const std::string& name) {
  std::error_code failure;
  const fs::path program = fs::read_symlink("/proc/self/exe", failure);
  for (const fs::path& folder :
       {program.parent_path() / STANCHION_DATA_FROM_PROGRAM, fs::path(STANCHION_DATA_IN_SOURCE)}) {
    if (fs::exists(folder / name, failure)) return (folder / name).lexically_normal().string();
  }
  return "";
}

class ServeCommand : public Command {
 public:
  const char* name() const override { return "serve"; }
  const char* summary() const override { return "the same commands over HTTP, as jobs that survive a crash"; }
  void declare(Arguments& arguments) override;
  Result<int> run(const Call& call) override;

 private:
  void declare_log(Arguments& arguments);
  void declare_access(Arguments& arguments);
  void declare_limits(Arguments& arguments);
  Result<service::ServiceOptions> options() const;
  Result<LogOptions> log_options() const;

  std::optional<std::string> host_, store_, token_file_, tls_certificate_, tls_key_, page_, log_, log_format_,
      log_size_;
  std::optional<std::string> memory_cap_, store_size_, upload_size_;
  std::optional<std::int64_t> port_, processors_, cpu_cap_, queue_, keep_jobs_, connections_, grace_, rate_,
      heartbeat_, log_files_;
  std::vector<std::string> roots_, public_names_;
  bool behind_proxy_ = false;
};

void ServeCommand::declare_log(Arguments& arguments) {
  arguments.group("Log", true);
  arguments.text("--log", log_, "FILE", "one line an event; - for standard error");
  arguments.text("--log-format", log_format_, "text|json",
                 "json: each line an object, with the job's id (text)");
  arguments.text("--log-size", log_size_, "SIZE",
                 "then the file becomes NAME.1 and a new one begins (64M); 0: never");
  arguments.whole("--log-files", log_files_, "N", "older files that are kept (8)");
}

void ServeCommand::declare_access(Arguments& arguments) {
  arguments.group("Who may ask, and from where");
  arguments.text("--host", host_, "ADDRESS", "where to listen (127.0.0.1, this machine alone)");
  arguments.whole("--port", port_, "N", "port (8420); 0 takes a free one");
  arguments.text("--token-file", token_file_, "FILE",
                 "who may ask: a scope (read, submit, admin) and a token a line");
  // No files of a question: they are configured once, like the address.
  arguments.last().use = OptionUse::kRunner;
  arguments.text("--tls-cert", tls_certificate_, "FILE", "certificate chain, PEM");
  arguments.last().use = OptionUse::kRunner;
  arguments.text("--tls-key", tls_key_, "FILE", "its key, PEM");
  arguments.last().use = OptionUse::kRunner;
  arguments.flag("--behind-proxy", behind_proxy_, "a proxy in front encrypts");
  arguments.texts("--public-name", public_names_, "NAME", "host name by which the service is reached");
}

void ServeCommand::declare_limits(Arguments& arguments) {
  arguments.group("Limits");
  arguments.text("--memory-cap", memory_cap_, "SIZE", "of all jobs together (3/4 of the machine)");
  arguments.whole("--processors", processors_, "N", "for all jobs together (all)");
  arguments.whole("--cpu-cap", cpu_cap_, "SECONDS", "processor time of one job (86400)");
  arguments.text("--store-size", store_size_, "SIZE", "of inputs and analyses in the store (20G)");
  arguments.text("--upload-size", upload_size_, "SIZE", "of one upload (4G)");
  arguments.whole("--queue", queue_, "N", "jobs that may wait (100000)");
  arguments.whole("--keep-jobs", keep_jobs_, "N", "ended jobs that are kept (100000)");
  arguments.whole("--connections", connections_, "N", "open at a time (512)");
  arguments.whole("--rate", rate_, "N", "requests a second from one address (2000)");
  arguments.whole("--heartbeat", heartbeat_, "SECONDS",
                  "a silent stream of events says something so often (15)");
  arguments.whole("--grace", grace_, "SECONDS", "how long jobs may go on when the service is ended (10)");
}

void ServeCommand::declare(Arguments& arguments) {
  arguments.group("Files");
  arguments.text("--store", store_, "FOLDER",
                 "jobs and inputs (STANCHION_HOME, or ~/.local/share/stanchion)");
  arguments.texts("--root", roots_, "NAME=FOLDER", "a folder from which jobs may read files");
  arguments.text("--page", page_, "FOLDER", "the page's files, instead of those installed");
  declare_log(arguments);
  declare_access(arguments);
  declare_limits(arguments);
  arguments.closing(
      "Ends on SIGTERM or SIGINT: what runs is waited for, then put back into the queue.\n\n"
      "Example:\n"
      "  stanchion serve --root models=/srv/models\n"
      "  curl -H 'Content-Type: application/json' http://127.0.0.1:8420/v1/jobs \\\n"
      "    -d '{\"command\": \"check\", \"inputs\": {\"stiffness\": \"models/K.mtx\"}}'");
}

/// `target` becomes what was asked, within bounds.
template <class Number>
Status take(const std::optional<std::int64_t>& asked, const char* option, std::int64_t least,
            std::int64_t most, Number& target) {
  if (!asked) return {};
  if (*asked < least || *asked > most) {
    return Status::bad_usage("out-of-range", fmt::format("{} is out of range", *asked), option,
                             fmt::format("from {} to {}", least, most));
  }
  target = static_cast<Number>(*asked);
  return {};
}

Status take_size(const std::optional<std::string>& asked, Offset& target) {
  if (!asked) return {};
  const auto bytes = parse_byte_size(*asked);
  if (bytes.ok()) target = *bytes;
  return bytes.status();
}

Result<service::ServiceOptions> ServeCommand::options() const {
  service::ServiceOptions options;
  options.address = {host_.value_or("127.0.0.1"), static_cast<int>(kDefaultPort)};
  options.store = store_.value_or(usual_store());
  options.roots = roots_;
  options.token_file = token_file_;
  options.tls_certificate = tls_certificate_;
  options.tls_key = tls_key_;
  options.public_names = public_names_;
  options.behind_proxy = behind_proxy_;
  options.page_folder = page_ ? *page_ : data_path("page");
  options.description = data_path("openapi.json");
  options.share = {usual_memory(), static_cast<int>(std::max(1U, std::thread::hardware_concurrency())),
                   86'400};
  std::int64_t grace = 10, heartbeat = 15;
  constexpr std::int64_t kMany = 1'000'000'000;
  for (const Status& status :
       {take(port_, "--port", 0, 65'535, options.address.port),
        take(processors_, "--processors", 1, 4096, options.share.processors),
        take(cpu_cap_, "--cpu-cap", 1, kMany, options.share.cpu_seconds),
        take(queue_, "--queue", 1, kMany, options.queued_jobs),
        take(keep_jobs_, "--keep-jobs", 0, kMany, options.kept_jobs),
        take(connections_, "--connections", 1, 20'000, options.http.connections),
        take(rate_, "--rate", 1, kMany, options.requests_per_second),
        take(grace_, "--grace", 0, 86'400, grace), take(heartbeat_, "--heartbeat", 1, 3600, heartbeat),
        take_size(memory_cap_, options.share.memory_bytes), take_size(store_size_, options.store_bytes),
        take_size(upload_size_, options.upload_bytes)}) {
    if (!status.ok()) return status;
  }
  options.grace = std::chrono::seconds(grace);
  options.heartbeat = std::chrono::seconds(heartbeat);
  if (options.store.empty()) {
    return Status::bad_usage("missing-argument", "there is no place for the jobs", "--store",
                             "give --store FOLDER");
  }
  return options;
}

Result<LogOptions> ServeCommand::log_options() const {
  LogOptions options;
  options.path = log_;
  options.append = true;
  options.rotate_bytes = Offset{64} << 20;
  options.kept_files = 8;
  const auto json = wants_json_log(log_format_);
  if (!json.ok()) return json.status();
  options.json = *json;
  if (log_size_ == "0") {
    options.rotate_bytes = 0;
  } else if (Status status = take_size(log_size_, options.rotate_bytes); !status.ok()) {
    return status;
  }
  if (Status status = take(log_files_, "--log-files", 0, 100'000, options.kept_files); !status.ok())
    return status;
  return options;
}

Result<int> ServeCommand::run(const Call& call) {
  CancellationToken token;
  const InterruptGuard guard(token);
  auto made = options();
  if (!made.ok()) return made.status();
  const auto wanted = log_options();
  if (!wanted.ok()) return wanted.status();
  const auto log = LogFile::open(*wanted);
  if (!log.ok()) return log.status();
  made->rules = call.rules();
  made->log = [&log](const LogRecord& record) { log->record(record); };
  const std::string scheme = made->tls_certificate ? "https" : "http";
  std::string host = made->address.host;
  if (host.find(':') != std::string::npos) host = "[" + host + "]";
  auto running = service::Service::start(std::move(*made));
  if (!running.ok()) return running.status();
  const std::string where = fmt::format("{}://{}:{}/", scheme, host, (*running)->port());
  if (Status status = print_result("listening on " + where + "\n"); !status.ok()) return status;
  log->record(
      {"listening", fmt::format("{} listens on {}, process {}", program_version(), where, ::getpid())});
  while (!token.cancelled()) std::this_thread::sleep_for(std::chrono::milliseconds(100));
  log->record({"ending", "asked to end"});
  (*running)->stop();
  log->record({"ended", "ended"});
  return 0;
}

}  // namespace

std::unique_ptr<Command> make_serve_command() {
  return std::make_unique<ServeCommand>();
}

}  // namespace stanchion::cli
