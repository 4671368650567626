// What is asked over HTTP and how it is answered; data/openapi.json describes it.
#pragma once

#include <atomic>
#include <memory>
#include <optional>
#include <string>

#include "service/event_feed.hpp"
#include "service/http_message.hpp"
#include "service/http_server.hpp"
#include "service/input_store.hpp"
#include "service/job_journal.hpp"
#include "service/job_runner.hpp"
#include "service/metrics.hpp"
#include "service/origin.hpp"
#include "service/page_files.hpp"
#include "service/rate_limit.hpp"
#include "service/roots.hpp"
#include "service/service.hpp"
#include "service/tokens.hpp"

namespace stanchion::service {

/// What the API works with; outlives it.
struct ApiParts {
  const ServiceOptions& options;
  JobJournal& journal;
  InputStore& inputs;
  const Roots& roots;
  EventFeed& feed;
  JobRunner& runner;
  JobFinisher& finisher;
  const std::optional<Tokens>& tokens;
  const OriginRules& origin;
  const PageFiles& page;
  std::function<HttpFigures()> http_figures;
};

/// Thread safe.
class Api {
 public:
  explicit Api(ApiParts parts);

  HttpResponse answer(const HttpRequest& request);

  /// From now on /ready says no, and streams end.
  void close() { closing_ = true; }

 private:
  struct Call {
    const HttpRequest& request;
    Scope scope;
    std::string id;    ///< of the job, or digest of the input
    std::string name;  ///< what of it
  };
  using Handler = HttpResponse (Api::*)(const Call&);
  struct Route {
    const char* method;
    const char* path;  ///< "*" stands for one part
    Handler handler;
    Scope scope;
  };
  static const std::vector<Route>& routes();

  HttpResponse route(const HttpRequest& request, std::string& label);
  std::optional<HttpResponse> refuse(const HttpRequest& request, bool is_page) const;
  Scope scope_of(const RequestHead& head) const;
  Result<std::string> read_text(const HttpRequest& request, HttpResponse& refusal) const;

  HttpResponse submit(const Call& call);
  HttpResponse list_jobs(const Call& call);
  HttpResponse get_job(const Call& call);
  HttpResponse delete_job(const Call& call);
  HttpResponse cancel_job(const Call& call);
  HttpResponse get_file(const Call& call);
  HttpResponse job_events(const Call& call);
  HttpResponse all_events(const Call& call);
  HttpResponse upload(const Call& call);
  HttpResponse list_inputs(const Call& call);
  HttpResponse get_input(const Call& call);
  HttpResponse delete_input(const Call& call);
  HttpResponse list_analyses(const Call& call);
  HttpResponse list_files(const Call& call);
  HttpResponse list_commands(const Call& call);
  HttpResponse service_facts(const Call& call);
  HttpResponse description(const Call& call);
  HttpResponse live(const Call& call);
  HttpResponse ready(const Call& call);
  HttpResponse metrics(const Call& call);

  HttpResponse events(const Call& call, const std::string& job);
  Result<JobRecord> read_submission(const std::string& body);
  std::optional<JobProblem> settle_inputs(JobRequest& request, JobRecord& job);
  HttpResponse insert(JobRecord& job);
  std::optional<JobRecord> find_job(const std::string& id, HttpResponse& refusal) const;

  ApiParts parts_;
  RateLimit rate_;
  RequestFigures figures_;
  std::string description_;
  std::atomic<bool> closing_{false};
};

HttpResponse json_response(int status, const nlohmann::ordered_json& json);

}  // namespace stanchion::service
