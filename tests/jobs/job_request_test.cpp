#include "jobs/job_request.hpp"

#include <gtest/gtest.h>

#include "jobs/strict_json.hpp"

namespace stanchion {
namespace {

/// A command with an option of every kind, as the command line would declare it.
RequestRules rules() {
  CommandTable table;
  table.name = "count";
  table.requestable = true;
  table.options = {
      {"K", "stiffness", "FILE", "", "", OptionKind::kPositional, OptionUse::kInput, true},
      {"steps", "steps", "FILE", "", "", OptionKind::kPositionals, OptionUse::kInput},
      {"--geometric", "geometric", "FILE", "", "", OptionKind::kText, OptionUse::kInput},
      {"--add", "added", "FILE:factor", "", "", OptionKind::kTexts, OptionUse::kInput},
      {"--load-sign", "load_sign", "plus|minus", "", "", OptionKind::kText},
      {"--at", "at", "s1,s2,...", "", "", OptionKind::kNumbers},
      {"--risk", "risk", "p", "", "", OptionKind::kReal},
      {"--threads", "threads", "N", "", "", OptionKind::kWhole},
      {"--strike-held", "strike_held", "", "", "", OptionKind::kFlag},
      {"--title", "title", "TEXT", "", "", OptionKind::kText},
      {"--json", "json", "FILE", "", "", OptionKind::kText, OptionUse::kOutput},
      {"--quiet", "quiet", "", "", "", OptionKind::kFlag, OptionUse::kRunner},
  };
  CommandTable hidden;
  hidden.name = "convert";
  return {{table, hidden}, {}};
}

TEST(JobRequest, BecomesAnArgumentVectorWithoutAShell) {
  const auto request = parse_request(
      R"({"options": {"at": [1.5, -2, 1e-3], "risk": 1e-9, "threads": 2, "strike_held": true,
                      "load_sign": "minus", "title": "; rm -rf / $(x) \"y\""},
          "inputs": {"added": [{"path": "a:b.mtx", "factor": 1.35}], "geometric": "--G.mtx",
                     "stiffness": "-K.mtx", "steps": ["two.mtx"]},
          "command": "count", "id": "a.b-c_1"})",
      rules());
  ASSERT_TRUE(request.ok()) << request.status().to_string();
  EXPECT_EQ(
      arguments_of(*request),
      (std::vector<std::string>{"count", "./-K.mtx", "two.mtx", "--geometric=--G.mtx", "--add=a:b.mtx:1.35",
                                "--load-sign=minus", "--at=1.5,-2,0.001", "--risk=1e-09", "--threads=2",
                                "--strike-held", "--title=; rm -rf / $(x) \"y\""}));
}

TEST(JobRequest, IsWrittenAsItWasRead) {
  const std::string text =
      R"({"id":"x","command":"count","inputs":{"stiffness":"K","steps":["L"],)"
      R"("added":[{"path":"A","factor":-0.5}]},"options":{"at":[1.5,2],"threads":3,"strike_held":true,"title":"ü"}})";
  const auto request = parse_request(text, rules());
  ASSERT_TRUE(request.ok()) << request.status().to_string();
  EXPECT_EQ(nlohmann::json::parse(request_to_json(*request)), nlohmann::json::parse(text));
  const auto again = parse_request(request_to_json(*request), rules());
  ASSERT_TRUE(again.ok());
  EXPECT_EQ(request_to_json(*again), request_to_json(*request));
}

TEST(JobRequest, ResolvesRelativePathsOnly) {
  auto request = parse_request(
      R"({"id":"x","command":"count","inputs":{"stiffness":"K","geometric":"/abs/G"}})", rules());
  ASSERT_TRUE(request.ok());
  resolve_inputs(*request, "/folder");
  EXPECT_EQ(arguments_of(*request), (std::vector<std::string>{"count", "/folder/K", "--geometric=/abs/G"}));
}

struct Bad {
  const char* json;
  const char* code;
  const char* place;
  const char* said;
};

TEST(JobRequest, RefusesWhatItDoesNotKnowAndNamesTheKey) {
  const Bad cases[] = {
      {"", "bad-json", "", "line 1"},
      {"[]", "bad-request", "", "object"},
      {R"({"id":"x")", "bad-json", "", "column"},
      {R"({"id":"x","id":"y"})", "bad-json", "", "'id' is there twice"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"option":{}})", "bad-request", "option",
       "'option' is no key"},
      {R"({"command":"count","inputs":{"stiffness":"K"}})", "bad-request", "id", "missing"},
      {R"({"id":"../x","command":"count","inputs":{"stiffness":"K"}})", "bad-request", "id", "no name"},
      {R"({"id":7,"command":"count","inputs":{"stiffness":"K"}})", "bad-request", "id", "text"},
      {R"({"id":"x","command":"convert","inputs":{"stiffness":"K"}})", "unknown-command", "command",
       "convert"},
      {R"({"id":"x","command":"count"})", "bad-request", "inputs", "missing"},
      {R"({"id":"x","command":"count","inputs":{}})", "bad-request", "inputs/stiffness", "missing"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":""}})", "bad-request", "inputs/stiffness",
       "empty"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K\u0000"}})", "bad-request", "inputs/stiffness",
       "zero byte"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K","stifness":"K"}})", "bad-request",
       "inputs/stifness", "'stifness' is no key"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K","added":[{"path":"A"}]}})", "bad-request",
       "inputs/added/0/factor", "missing"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"risk":"1e-6"}})", "bad-request",
       "options/risk", "number"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"risk":1e999}})", "bad-json", "",
       "overflow"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"threads":1.5}})", "bad-request",
       "options/threads", "whole"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"strike_held":"yes"}})",
       "bad-request", "options/strike_held", "true or false"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"load_sign":"up"}})",
       "bad-request", "options/load_sign", "'up'"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"geometric":"G"}})",
       "bad-request", "options/geometric", "read"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"json":"/etc/passwd"}})",
       "unknown-option", "options/json", "whoever runs"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"quiet":true}})",
       "unknown-option", "options/quiet", "whoever runs"},
      {R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"digit":3}})", "unknown-option",
       "options/digit", "'digit' is no option of count"},
  };
  for (const Bad& bad : cases) {
    const auto request = parse_request(bad.json, rules());
    ASSERT_FALSE(request.ok()) << bad.json;
    EXPECT_EQ(request.status().code(), bad.code) << bad.json;
    EXPECT_EQ(request.status().place(), bad.place) << bad.json;
    EXPECT_NE(request.status().message().find(bad.said), std::string::npos) << request.status().to_string();
    EXPECT_FALSE(request.status().remedy().empty()) << bad.json;
    EXPECT_EQ(request.status().kind(), StatusKind::kBadInput);
  }
}

TEST(JobRequest, IsLimitedInSizeAndDepth) {
  EXPECT_FALSE(parse_request(std::string(2 << 20, ' '), rules()).ok());
  const std::string deep = std::string(100'000, '[') + std::string(100'000, ']');
  const auto nested = parse_request(deep, rules());
  ASSERT_FALSE(nested.ok());
  EXPECT_NE(nested.status().message().find("deep"), std::string::npos);
  std::string many = R"({"id":"x","command":"count","inputs":{"stiffness":"K"},"options":{"at":[0)";
  for (int i = 0; i < 20'000; ++i) many += ",1";
  EXPECT_FALSE(parse_request(many + "]}}", rules()).ok());
}

TEST(JobRequest, AsksTheCommandLineAboutTheWhole) {
  RequestRules strict = rules();
  strict.check = [](const std::vector<std::string>& arguments) {
    return arguments.size() > 2 ? Status{}
                                : Status::bad_usage("missing-argument", "no shift", "--at", "give one");
  };
  const auto request = parse_request(R"({"id":"x","command":"count","inputs":{"stiffness":"K"}})", strict);
  ASSERT_FALSE(request.ok());
  EXPECT_EQ(request.status().code(), "missing-argument");
}

TEST(JobRequest, AnIdCanNameAFile) {
  for (const char* good : {"a", "7", "_", "A.b-c", "0123456789abcdef"}) EXPECT_TRUE(is_job_id(good)) << good;
  for (const char* bad : {"", ".", "..", ".a", "-a", "a/b", "a b", "a\n", "ä", "a:b"}) {
    EXPECT_FALSE(is_job_id(bad)) << bad;
  }
  EXPECT_TRUE(is_job_id(std::string(200, 'a')));
  EXPECT_FALSE(is_job_id(std::string(201, 'a')));
}

}  // namespace
}  // namespace stanchion
