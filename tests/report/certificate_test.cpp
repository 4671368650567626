#include "report/certificate_json.hpp"

#include <gtest/gtest.h>

#include <nlohmann/json.hpp>

#include "report/recheck_report.hpp"
#include "report/samples.hpp"

namespace stanchion {
namespace {

using Json = nlohmann::ordered_json;

CertificateDocument certificate_of(Outcome outcome) {
  CertificateDocument document;
  Request& request = document.request;
  for (const InputRecord& input : outcome.inputs) {
    document.files.push_back({input.role, input.path, "/models/" + input.path, input.sha256, input.rows,
                              input.entries, input.factor});
  }
  document.files.push_back({"fix", "fix.csv", "/models/fix.csv", std::string(64, 'f'), {}, {}, {}});
  if (outcome.count) {
    request.pencil = Pencil::kGeometric;
    for (const ShiftCount& count : outcome.count->counts) request.shifts.push_back(count.shift);
  }
  request.input.load_sign_minus = true;
  request.digits = 8;
  request.resolution = 1e-10;
  request.precision = Precision::kExtended;
  outcome.risk_allowed = request.risk;
  document.outcome = std::move(outcome);
  return document;
}

CertificateDocument read_back(const CertificateDocument& document) {
  auto read = read_certificate(certificate_to_json(document), "claim.json");
  EXPECT_TRUE(read.ok()) << read.status().to_string();
  return read.ok() ? *read : CertificateDocument{};
}

TEST(CertificateJson, WhatIsClaimedReadsBack) {
  for (const auto& [name, outcome] : samples::all()) {
    if (outcome.forecast || outcome.command == "locate") continue;
    const Outcome back = read_back(certificate_of(outcome)).outcome;
    SCOPED_TRACE(name);
    EXPECT_EQ(back.command, outcome.command);
    EXPECT_EQ(back.rows_analysed, outcome.rows_analysed);
    EXPECT_EQ(back.risk, outcome.risk);
    ASSERT_EQ(back.check.has_value(), outcome.check.has_value());
    ASSERT_EQ(back.count.has_value(), outcome.count.has_value());
    if (back.check) {
      EXPECT_EQ(back.check->verdict, outcome.check->verdict);
      EXPECT_EQ(back.check->inertia.zero, outcome.check->inertia.zero);
      EXPECT_EQ(back.check->certificate.runs.size(), outcome.check->certificate.runs.size());
      EXPECT_EQ(back.check->certificate.error_bound, outcome.check->certificate.error_bound);
      ASSERT_EQ(back.check->constrained.has_value(), outcome.check->constrained.has_value());
      if (back.check->constrained) {
        EXPECT_EQ(back.check->constrained->rank_backing.level,
                  outcome.check->constrained->rank_backing.level);
        EXPECT_EQ(back.check->constrained->inertia_backing.failure_probability,
                  outcome.check->constrained->inertia_backing.failure_probability);
      }
    }
    if (back.count) {
      EXPECT_EQ(back.count->counts.size(), outcome.count->counts.size());
      EXPECT_EQ(back.count->sentences, outcome.count->sentences);
      EXPECT_EQ(back.count->counts.back().below_range, outcome.count->counts.back().below_range);
      EXPECT_EQ(back.count->counts.front().holds_outside, outcome.count->counts.front().holds_outside);
    }
  }
}

TEST(CertificateJson, TheRequestReadsBack) {
  const Request request = read_back(certificate_of(samples::counted())).request;
  EXPECT_EQ(request.input.stiffness, "bridge/K.mtx");
  EXPECT_EQ(request.input.geometric, "bridge/G.mtx");
  EXPECT_EQ(request.input.fix, "fix.csv");
  EXPECT_EQ(request.pencil, Pencil::kGeometric);
  EXPECT_EQ(request.shifts, (std::vector<double>{1.5, -2.25, 12}));
  EXPECT_TRUE(request.input.load_sign_minus);
  EXPECT_EQ(request.digits, 8);
  EXPECT_EQ(request.resolution, 1e-10);
  EXPECT_EQ(request.precision, Precision::kExtended);
  const Request sum = read_back(certificate_of(samples::definite())).request;
  ASSERT_EQ(sum.input.added.size(), 2U);
  EXPECT_EQ(sum.input.added[1].path, "bridge/soil.mtx");
  EXPECT_EQ(sum.input.added[1].factor, -0.5);
}

TEST(CertificateJson, EventsAndLargeSeedsAreKept) {
  CertificateDocument document = certificate_of(samples::indefinite());
  document.outcome.seed = ~std::uint64_t{0};
  document.outcome.events = {{{}, 6e-7, false}, {-1.5, 1.5e-7, true}};
  const Json json = Json::parse(certificate_to_json(document));
  EXPECT_EQ(json["events"], Json::parse(R"([{"factor":null,"charged":6e-7,"certified":false},
                                            {"factor":-1.5,"charged":1.5e-7,"certified":true}])"));
  EXPECT_EQ(read_back(document).outcome.seed, ~std::uint64_t{0});
}

TEST(CertificateJson, EveryMissingMemberOfAClaimIsNoticed) {
  for (const Outcome& outcome : {samples::constrained(), samples::counted()}) {
    const Json whole = Json::parse(certificate_to_json(certificate_of(outcome)));
    for (const auto& [key, value] : whole["claims"][0].items()) {
      if (key == "statement" || key == "method" || key == "failure_probability")
        continue;  // told again elsewhere
      Json damaged = whole;
      damaged["claims"][0].erase(key);
      const auto read = read_certificate(damaged.dump(), "claim.json");
      ASSERT_FALSE(read.ok()) << key;
      EXPECT_EQ(read.status().code(), "bad-certificate");
      EXPECT_NE(read.status().message().find("claims/0/" + key), std::string::npos)
          << read.status().message();
    }
  }
}

TEST(CertificateJson, AnythingElseIsRefused) {
  for (const char* text : {"", "{}", "[]", "null", "{\"document\":\"certificate\"}", "[[[[", "\xff\xfe"}) {
    const auto read = read_certificate(text, "claim.json");
    ASSERT_FALSE(read.ok()) << text;
    EXPECT_EQ(read.status().kind(), StatusKind::kBadInput);
  }
}

RecheckReport report_with(Agreement agreement) {
  RecheckReport report{"claim.json",          std::string(64, '0'), "0.1.0", {}, {},
                       samples::indefinite(), samples::indefinite()};
  report.claims.push_back({{}, agreement, "indefinite: 2 negative", "indefinite: 2 negative", "a reason"});
  return report;
}

TEST(RecheckReport, SaysAgreedOrNot) {
  EXPECT_EQ(recheck_to_text(report_with(Agreement::kAgreed)).rfind("Agreed: ", 0), 0U);
  EXPECT_EQ(recheck_to_text(report_with(Agreement::kNotRepeated)).rfind("Not repeated: ", 0), 0U);
  const std::string alarm = recheck_to_text(report_with(Agreement::kContradicted));
  EXPECT_EQ(alarm.rfind("NOT AGREED: ", 0), 0U);
  EXPECT_NE(alarm.find("By chance alone"), std::string::npos);
  EXPECT_NE(alarm.find("a reason"), std::string::npos);
  const Json json = Json::parse(recheck_to_json(report_with(Agreement::kContradicted)));
  EXPECT_EQ(json["agreed"], false);
  EXPECT_EQ(json["claims"][0]["result"], "contradicted");
  EXPECT_TRUE(json["other_library"].is_null());
}

TEST(RecheckReport, AnotherLibraryThatCountsOtherwiseIsSaid) {
  RecheckReport report = report_with(Agreement::kAgreed);
  report.library = {"Other", "5.5", {{{}, 4.6e-12, 13, 13, {}}, {1.5, -4.6e-12, 12, 12, {}}}};
  EXPECT_EQ(agreement_of(report), Agreement::kAgreed);
  EXPECT_NE(recheck_to_text(report).find("Other 5.5: the same number of negative pivots in 2 of 2"),
            std::string::npos);
  report.library->counts[1].found = 14;
  EXPECT_EQ(agreement_of(report), Agreement::kNotRepeated);
  const std::string text = recheck_to_text(report);
  EXPECT_EQ(
      text.rfind("Not repeated: the second path agrees with the certificate, but Other counts otherwise.", 0),
      0U);
  EXPECT_NE(text.find("at shift 1.5, offset -4.6e-12: 14, in the certificate 12"), std::string::npos) << text;
  const Json json = Json::parse(recheck_to_json(report));
  EXPECT_EQ(json["result"], "not_repeated");
  EXPECT_EQ(json["claims"][0]["result"], "agreed");
  EXPECT_EQ(json["other_library"]["result"], "not_repeated");
  EXPECT_EQ(json["other_library"]["counts"][1]["found"], 14);
  report.library->counts[1] = {{}, 0, 12, {}, "it finds the matrix singular"};
  EXPECT_NE(recheck_to_text(report).find("offset +0: nothing (it finds the matrix singular)"),
            std::string::npos);
  report.claims[0].agreement = Agreement::kContradicted;
  EXPECT_EQ(agreement_of(report), Agreement::kContradicted);
}

}  // namespace
}  // namespace stanchion
