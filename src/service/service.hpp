// The service as a whole: store, runner and HTTP put together, from start to orderly end.
#pragma once

#include <cstdint>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "base/log_record.hpp"
#include "jobs/job_request.hpp"
#include "service/http_server.hpp"
#include "service/job_needs.hpp"
#include "stanchion/status.hpp"

namespace stanchion::service {

struct ServiceOptions {
  HttpAddress address;
  std::string store;               ///< folder; made when it is not there
  std::vector<std::string> roots;  ///< NAME=FOLDER
  std::optional<std::string> token_file, tls_certificate, tls_key;
  std::vector<std::string> public_names;  ///< besides the address, what Host may say
  bool behind_proxy = false;
  std::string page_folder;  ///< empty: no page
  std::string description;  ///< path of openapi.json
  MachineShare share;
  std::int64_t store_bytes = std::int64_t{20} << 30;
  std::int64_t upload_bytes = std::int64_t{4} << 30;
  std::int64_t request_bytes = std::int64_t{1} << 20;
  std::int64_t queued_jobs = 100'000;
  std::int64_t kept_jobs = 100'000;  ///< ended ones; the oldest are deleted
  double requests_per_second = 2000;
  HttpLimits http;
  std::chrono::milliseconds grace{10'000};
  RequestRules rules;
  std::chrono::milliseconds heartbeat{15'000};  ///< a silent stream of events says something so often
  LogSink log;
};

/// What contradicts itself or would be unsafe: an address beyond loopback without tokens, or without
/// encryption and without a proxy in front. Bad usage.
Status check_exposure(const ServiceOptions& options);

class Service {
 public:
  /// Everything up to the first answer; recovers what a crash left. Bad usage for options, resource limits
  /// "store", "store-in-use" (another service works on it), "cannot-listen".
  static Result<std::unique_ptr<Service>> start(ServiceOptions options);
  ~Service();
  Service(const Service&) = delete;
  Service& operator=(const Service&) = delete;

  int port() const;

  /// Accepts nothing more, lets requests and, for a while, jobs end; puts the rest back into the queue.
  void stop();

 private:
  struct Parts;
  explicit Service(std::unique_ptr<Parts> parts);
  std::unique_ptr<Parts> parts_;
};

}  // namespace stanchion::service
