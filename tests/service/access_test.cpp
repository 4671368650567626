// Tokens, origins, rates, addresses.
#include <gtest/gtest.h>
#include <sys/stat.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>

#include "service/http_server.hpp"
#include "service/origin.hpp"
#include "service/rate_limit.hpp"
#include "service/service.hpp"
#include "service/tokens.hpp"

namespace stanchion::service {
namespace {

TEST(Access, ComparesEveryCharacter) {
  EXPECT_TRUE(equal_in_constant_time("abc", "abc"));
  EXPECT_FALSE(equal_in_constant_time("abc", "abd"));
  EXPECT_FALSE(equal_in_constant_time("abc", "ab"));
  EXPECT_FALSE(equal_in_constant_time(std::string_view("a\0b", 3), std::string_view("a\0c", 3)));
}

TEST(Access, HostNames) {
  EXPECT_EQ(host_name_of("LocalHost:80"), "localhost");
  EXPECT_EQ(host_name_of("[::1]:80"), "::1");
  EXPECT_EQ(host_name_of("[::1"), "");
  EXPECT_EQ(host_name_of(""), "");
}

TEST(Access, LoopbackIsNumericOrLocalhost) {
  for (const char* host : {"127.0.0.1", "127.9.9.9", "::1", "localhost"})
    EXPECT_TRUE(is_loopback(host)) << host;
  for (const char* host :
       {"0.0.0.0", "::", "10.0.0.1", "127.0.0.1.example", "127.evil", "localhost.example", ""}) {
    EXPECT_FALSE(is_loopback(host)) << host;
  }
}

TEST(Access, ExposureHasItsConditions) {
  ServiceOptions options;
  EXPECT_TRUE(check_exposure(options).ok());
  options.address.host = "192.0.2.1";
  EXPECT_EQ(check_exposure(options).code(), "no-tokens");
  options.token_file = "tokens";
  EXPECT_EQ(check_exposure(options).code(), "not-encrypted");
  options.behind_proxy = true;
  EXPECT_TRUE(check_exposure(options).ok());
  options.behind_proxy = false;
  options.tls_certificate = "c";
  EXPECT_EQ(check_exposure(options).code(), "contradiction");
  options.tls_key = "k";
  EXPECT_TRUE(check_exposure(options).ok());
}

TEST(Access, TokensAreTheOwnersAloneOrACredential) {
  namespace fs = std::filesystem;
  std::string name = (fs::temp_directory_path() / "stanchion_tokens_XXXXXX").string();
  ASSERT_NE(::mkdtemp(name.data()), nullptr);
  const fs::path folder = name, file = folder / "own" / "tokens", beside = folder / "tokens";
  fs::create_directory(folder / "own");
  for (const fs::path& path : {file, beside}) std::ofstream(path) << "admin " << std::string(32, 'a') << "\n";
  const auto code_with = [](const fs::path& path, mode_t mode) {
    EXPECT_EQ(::chmod(path.c_str(), mode), 0);
    const auto tokens = Tokens::load(path.string());
    if (!tokens.ok()) return tokens.status().code();
    EXPECT_EQ(tokens->scope_of("Bearer " + std::string(32, 'a')), Scope::kAdmin);
    return std::string();
  };
  ::unsetenv("CREDENTIALS_DIRECTORY");
  EXPECT_EQ(code_with(file, 0600), "");
  EXPECT_EQ(code_with(file, 0400), "");
  for (const mode_t mode : {0440, 0404, 0420, 0640, 0604, 0660, 0777})
    EXPECT_EQ(code_with(file, mode), "open-token-file");
  // systemd: 0400 where the file system has no access lists, 0440 where it has.
  ASSERT_EQ(::setenv("CREDENTIALS_DIRECTORY", (folder / "own").c_str(), 1), 0);
  EXPECT_EQ(code_with(file, 0400), "");
  EXPECT_EQ(code_with(file, 0440), "");
  for (const mode_t mode : {0404, 0444, 0460, 0450}) EXPECT_EQ(code_with(file, mode), "open-token-file");
  EXPECT_EQ(code_with(beside, 0440), "open-token-file");
  // A link in the folder to a file elsewhere is no credential.
  fs::create_symlink(beside, folder / "own" / "link");
  EXPECT_EQ(Tokens::load((folder / "own" / "link").string()).status().code(), "open-token-file");
  ASSERT_EQ(::unsetenv("CREDENTIALS_DIRECTORY"), 0);
  fs::remove_all(folder);
}

TEST(Access, RateRefills) {
  RateLimit limit(10, 3);
  RateLimit::Time now{};
  for (int k = 0; k < 3; ++k) EXPECT_TRUE(limit.allow("a", now));
  EXPECT_FALSE(limit.allow("a", now));
  EXPECT_TRUE(limit.allow("b", now));
  now += std::chrono::milliseconds(100);
  EXPECT_TRUE(limit.allow("a", now));
  EXPECT_FALSE(limit.allow("a", now));
  // Ten thousand addresses do not fill the memory, and do not lock out those who come later.
  for (int k = 0; k < 10000; ++k) limit.allow("c" + std::to_string(k), now);
  now += std::chrono::seconds(10);
  EXPECT_TRUE(limit.allow("d", now));
}

}  // namespace
}  // namespace stanchion::service
