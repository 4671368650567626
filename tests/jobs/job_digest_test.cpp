#include "jobs/job_digest.hpp"

#include <gtest/gtest.h>

#include "base/digest.hpp"
#include "jobs/folder.hpp"

namespace stanchion {
namespace {

JobRequest job(const std::string& path, const std::string& id = "x", const std::string& command = "count",
               const std::string& key = "stiffness", const std::string& shift = "1.5") {
  return {
      id, command, {{key, "", path, std::nullopt}}, {JobOption{"at", "--at", shift, OptionKind::kNumbers}}};
}

std::string digest(const JobRequest& request) {
  FileDigests files;
  const auto value = digest_of(request, files);
  EXPECT_TRUE(value.ok()) << value.status().to_string();
  return value.ok() ? *value : "";
}

TEST(JobDigest, IsThatOfContentsNotOfNames) {
  const TestFolder folder;
  const auto one = folder.write("one", "bytes"), two = folder.write("two", "bytes");
  const auto other = folder.write("other", "Bytes");
  EXPECT_EQ(digest(job(one)), digest(job(two)));
  EXPECT_NE(digest(job(one)), digest(job(other)));
  EXPECT_EQ(digest(job(one, "y")), digest(job(one)));
}

TEST(JobDigest, SeesEveryOptionButThreads) {
  const TestFolder folder;
  const auto file = folder.write("K", "bytes");
  const std::string plain = digest(job(file));
  EXPECT_NE(digest(job(file, "x", "count", "stiffness", "1.50000001")), plain);
  EXPECT_NE(digest(job(file, "x", "sweep")), plain);
  EXPECT_NE(digest(job(file, "x", "count", "geometric")), plain);
  JobRequest changed = job(file);
  changed.inputs[0].factor = 1;
  EXPECT_NE(digest(changed), plain);
  changed = job(file);
  changed.options.push_back(JobOption{"threads", "--threads", "2", OptionKind::kWhole});
  EXPECT_EQ(digest(changed), plain);
}

TEST(JobDigest, ReadsAgainWhatHasChanged) {
  const TestFolder folder;
  const auto file = folder.write("K", "before");
  FileDigests files;
  EXPECT_EQ(*files.of(file), sha256("before"));
  EXPECT_EQ(*files.of(file), sha256("before"));
  folder.write("K", "after, and longer");
  EXPECT_EQ(*files.of(file), sha256("after, and longer"));
}

TEST(JobDigest, SaysWhichFileIsMissing) {
  const TestFolder folder;
  FileDigests files;
  const auto missing = digest_of(job(folder / "none"), files);
  ASSERT_FALSE(missing.ok());
  EXPECT_EQ(missing.status().code(), "file-not-found");
  EXPECT_EQ(missing.status().place(), folder / "none");
  const auto a_folder = digest_of(job(folder.path()), files);
  ASSERT_FALSE(a_folder.ok());
  EXPECT_EQ(a_folder.status().code(), "not-a-file");
}

}  // namespace
}  // namespace stanchion
