#include "service/service.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <signal.h>
#include <sys/stat.h>

#include <condition_variable>
#include <filesystem>
#include <mutex>
#include <thread>

#include "service/api.hpp"
#include "service/problem.hpp"

namespace stanchion::service {
namespace {

namespace fs = std::filesystem;

OriginRules origin_rules(const ServiceOptions& options) {
  OriginRules rules;
  rules.hosts = {"localhost", "127.0.0.1", "::1", host_name_of(options.address.host)};
  if (options.address.host.find(':') != std::string::npos) rules.hosts.push_back(options.address.host);
  for (const std::string& name : options.public_names) rules.hosts.push_back(host_name_of(name));
  // A name that anybody may point here is no danger where every request needs a token.
  rules.any_host = options.token_file && options.public_names.empty() && !is_loopback(options.address.host);
  return rules;
}

/// A folder that is there already keeps its permissions: somebody may have named /tmp.
Status make_folder(const std::string& path) {
  std::error_code failure;
  const bool is_new = fs::create_directories(path, failure);
  if (!failure && is_new && ::chmod(path.c_str(), 0700) != 0) failure = {errno, std::generic_category()};
  if (!failure && !fs::is_directory(path)) failure = std::make_error_code(std::errc::not_a_directory);
  if (!failure) return {};
  return Status::resource_limit("store", "this folder cannot be made: " + failure.message(), path,
                                "name a folder where you may write with --store");
}

}  // namespace

Status check_exposure(const ServiceOptions& options) {
  if (options.tls_certificate.has_value() != options.tls_key.has_value()) {
    return Status::bad_usage("contradiction", "a certificate and its key go together", "--tls-cert",
                             "give both --tls-cert and --tls-key");
  }
  if (is_loopback(options.address.host)) return {};
  if (!options.token_file) {
    return Status::bad_usage("no-tokens", "beyond this machine nobody may ask without a token",
                             "--host " + options.address.host, "give --token-file FILE");
  }
  if (!options.tls_certificate && !options.behind_proxy) {
    return Status::bad_usage("not-encrypted",
                             "beyond this machine tokens and matrices would travel in the clear",
                             "--host " + options.address.host,
                             "give --tls-cert and --tls-key, or --behind-proxy where a proxy encrypts");
  }
  return {};
}

struct Service::Parts {
  explicit Parts(ServiceOptions given) : options(std::move(given)) {}

  ServiceOptions options;
  FileHandle lock;
  std::optional<Tokens> tokens;
  Roots roots;
  PageFiles page;
  OriginRules origin;
  std::shared_ptr<Encryption> encryption;
  EventFeed feed;
  std::unique_ptr<JobJournal> journal;
  std::unique_ptr<InputStore> inputs;
  std::unique_ptr<JobFinisher> finisher;
  std::unique_ptr<JobRunner> runner;
  std::unique_ptr<Api> api;
  std::unique_ptr<HttpServer> http;
  int port = 0;

  std::mutex mutex;
  std::condition_variable ends;
  bool stopping = false;
  std::thread housekeeper;

  Status prepare();
  Status open_store();
  Status begin();
  void keep_house();
  void drop_old_jobs();
  void drop_orphans();
};

Status Service::Parts::prepare() {
  if (Status status = check_exposure(options); !status.ok()) return status;
  if (options.token_file) {
    auto loaded = Tokens::load(*options.token_file);
    if (!loaded.ok()) return loaded.status();
    tokens = std::move(*loaded);
  }
  if (options.tls_certificate) {
    auto loaded = Encryption::load(*options.tls_certificate, *options.tls_key);
    if (!loaded.ok()) return loaded.status();
    encryption = std::move(*loaded);
  }
  auto opened = Roots::open(options.roots);
  if (!opened.ok()) return opened.status();
  roots = std::move(*opened);
  auto loaded = PageFiles::load(options.page_folder);
  if (!loaded.ok()) return loaded.status();
  page = std::move(*loaded);
  origin = origin_rules(options);
  return {};
}

Status Service::Parts::open_store() {
  if (Status status = make_folder(options.store); !status.ok()) return status;
  options.store = fs::canonical(options.store).string();
  for (const char* folder : {"/jobs", "/inputs", "/analyses"}) {
    if (Status status = make_folder(options.store + folder); !status.ok()) return status;
  }
  const auto open_private = [](const std::string& path) {
    return FileHandle(::open(path.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0600));
  };
  lock = open_private(options.store + "/lock");
  // The table's file is made here so that nobody else may read it, and closed again before it is locked.
  if (!lock || !open_private(options.store + "/jobs.sqlite")) {
    return Status::resource_limit("store",
                                  "this folder cannot be written: " + std::generic_category().message(errno),
                                  options.store, "name a folder where you may write with --store");
  }
  // Of this process alone: a child that was just forked does not hold it when the service is killed.
  struct flock whole {};
  whole.l_type = F_WRLCK;
  whole.l_whence = SEEK_SET;
  if (::fcntl(lock.get(), F_SETLK, &whole) != 0) {
    return Status::resource_limit("store-in-use", "another service works on this store", options.store,
                                  "end it, or name another folder with --store");
  }
  auto opened = JobJournal::open(options.store + "/jobs.sqlite");
  if (!opened.ok()) return opened.status();
  journal = std::move(*opened);
  inputs = std::make_unique<InputStore>(options.store, options.store_bytes, *journal);
  return {};
}

Status Service::Parts::begin() {
  finisher = std::make_unique<JobFinisher>(*journal, *inputs, feed, options.log);
  runner = std::make_unique<JobRunner>(RunnerParts{*journal, *inputs, roots, feed, *finisher, options.rules,
                                                   options.store + "/jobs", options.share, "/proc/self/exe",
                                                   options.log});
  api = std::make_unique<Api>(ApiParts{options, *journal, *inputs, roots, feed, *runner, *finisher, tokens,
                                       origin, page, [this] { return http->figures(); }});
  http = std::make_unique<HttpServer>([this](const HttpRequest& request) { return api->answer(request); },
                                      [](int status, const std::string& code, const std::string& detail) {
                                        auto response = problem_response(status, code, detail);
                                        response.fields.emplace_back("X-Content-Type-Options", "nosniff");
                                        return response;
                                      },
                                      options.http);
  std::vector<std::int64_t> queued;
  if (Status status = journal->read([&](JobTable& table) { queued = table.queued(); }); !status.ok())
    return status;
  drop_orphans();
  const auto bound = http->start(options.address, encryption);
  if (!bound.ok()) return bound.status();
  port = *bound;
  for (const std::int64_t number : queued) runner->enqueue(number);
  if (!queued.empty())
    options.log({"recovered", fmt::format("{} jobs of an earlier run go on", queued.size())});
  housekeeper = std::thread([this] { keep_house(); });
  return {};
}

/// Folders of jobs that the table does not know: deleted, while the files were still there.
void Service::Parts::drop_orphans() {
  std::error_code failure;
  for (const auto& entry : fs::directory_iterator(options.store + "/jobs", failure)) {
    std::optional<JobRecord> job;
    const std::string id = entry.path().filename().string();
    const Status status = journal->read([&](JobTable& table) { job = table.find(id); });
    if (status.ok() && !job) fs::remove_all(entry.path(), failure);
  }
}

void Service::Parts::drop_old_jobs() {
  std::vector<std::string> old;
  const Status status =
      journal->write([&](JobTable& table) { old = table.remove_old(options.kept_jobs, 1000); });
  if (!status.ok()) return;
  std::error_code failure;
  for (const std::string& id : old) {
    fs::remove_all(options.store + "/jobs/" + id, failure);
    feed.publish("removed", id, fmt::format("{{\"id\":\"{}\"}}", id));
  }
}

void Service::Parts::keep_house() {
  std::unique_lock guard(mutex);
  while (!ends.wait_for(guard, std::chrono::seconds(10), [this] { return stopping; })) {
    guard.unlock();
    try {
      inputs->evict();
      drop_old_jobs();
    } catch (const std::exception& error) {
      options.log({"housekeeping-failed", error.what(), "", LogLevel::kWarning});
    }
    guard.lock();
  }
}

Result<std::unique_ptr<Service>> Service::start(ServiceOptions options) {
  ::signal(SIGPIPE, SIG_IGN);
  auto parts = std::make_unique<Parts>(std::move(options));
  try {
    for (Status (Parts::*step)() : {&Parts::prepare, &Parts::open_store, &Parts::begin}) {
      if (Status status = (parts.get()->*step)(); !status.ok()) return status;
    }
  } catch (const fs::filesystem_error& error) {
    return Status::resource_limit("store", error.what(), parts->options.store,
                                  "look after the store's folder");
  }
  return std::unique_ptr<Service>(new Service(std::move(parts)));
}

Service::Service(std::unique_ptr<Parts> parts) : parts_(std::move(parts)) {}

Service::~Service() {
  stop();
}

int Service::port() const {
  return parts_->port;
}

void Service::stop() {
  {
    const std::lock_guard guard(parts_->mutex);
    if (parts_->stopping) return;
    parts_->stopping = true;
  }
  parts_->ends.notify_all();
  parts_->housekeeper.join();
  parts_->api->close();
  parts_->feed.close();
  parts_->http->stop();
  parts_->runner->stop(parts_->options.grace);
  parts_->finisher.reset();
}

}  // namespace stanchion::service
