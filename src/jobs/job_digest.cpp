#include "jobs/job_digest.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <vector>

#include "base/digest.hpp"
#include "model/version.hpp"

namespace stanchion {
namespace {

/// Closes what was opened.
class OpenFile {
 public:
  /// Does not wait for a writer of a pipe.
  explicit OpenFile(const std::string& path)
      : file_(::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NONBLOCK)) {}
  OpenFile(const OpenFile&) = delete;
  OpenFile& operator=(const OpenFile&) = delete;
  ~OpenFile() {
    if (file_ >= 0) ::close(file_);
  }
  int handle() const { return file_; }

 private:
  int file_;
};

Status cannot_read(const std::string& path, int error) {
  const bool absent = error == ENOENT || error == ENOTDIR;
  return Status::bad_input(absent ? "file-not-found" : "cannot-read",
                           fmt::format("the file cannot be read: {}", std::strerror(error)), path,
                           "check the path and its permissions");
}

long long nanoseconds(const struct timespec& time) {
  return static_cast<long long>(time.tv_sec) * 1'000'000'000 + time.tv_nsec;
}

Result<std::string> read_digest(int file, const std::string& path, const CancellationToken* stop) {
  std::vector<char> block(std::size_t{1} << 20);
  Sha256 digest;
  for (;;) {
    if (stop != nullptr && stop->cancelled()) return Status::interrupted();
    const ssize_t count = ::read(file, block.data(), block.size());
    if (count == 0) return digest.finish();
    if (count > 0) {
      digest.update({block.data(), static_cast<std::size_t>(count)});
    } else if (errno != EINTR) {
      return cannot_read(path, errno);
    }
  }
}

}  // namespace

FileDigests::Stamp FileDigests::stamp_of(const struct stat& about) {
  return {about.st_dev, about.st_ino, static_cast<unsigned long long>(about.st_size),
          nanoseconds(about.st_ctim), nanoseconds(about.st_mtim)};
}

std::optional<std::string> FileDigests::find(const std::string& path, const Stamp& stamp) {
  const std::lock_guard lock(mutex_);
  const auto found = known_.find(path);
  if (found == known_.end() || found->second.stamp != stamp) return std::nullopt;
  return found->second.sha256;
}

bool FileDigests::knows(const std::string& path) {
  struct stat about {};
  return ::stat(path.c_str(), &about) == 0 && find(path, stamp_of(about));
}

Result<std::string> FileDigests::of(const std::string& path, const CancellationToken* stop) {
  const OpenFile file(path);
  if (file.handle() < 0) return cannot_read(path, errno);
  struct stat about {};
  if (::fstat(file.handle(), &about) != 0) return cannot_read(path, errno);
  if (!S_ISREG(about.st_mode)) {
    return Status::bad_input("not-a-file", "this is no regular file", path, "name a file");
  }
  const Stamp stamp = stamp_of(about);
  if (auto known = find(path, stamp)) return *known;
  auto digest = read_digest(file.handle(), path, stop);
  if (!digest.ok()) return digest;
  const std::lock_guard lock(mutex_);
  known_[path] = {stamp, *digest};
  return digest;
}

bool digest_is_known(const JobRequest& request, FileDigests& files) {
  return std::all_of(request.inputs.begin(), request.inputs.end(),
                     [&files](const JobInput& input) { return files.knows(input.path); });
}

Result<std::string> digest_of(const JobRequest& request, FileDigests& files, const CancellationToken* stop) {
  // Every text goes in with its length, so that no two jobs can spell the same bytes.
  Sha256 digest;
  const auto add = [&digest](const std::string& text) {
    digest.update(fmt::format("{}:", text.size()));
    digest.update(text);
  };
  add("stanchion job 1");
  add(program_version());
  add(request.command);
  for (const JobInput& input : request.inputs) {
    const auto content = files.of(input.path, stop);
    if (!content.ok()) return content.status();
    add(input.key);
    add(*content);
    add(input.factor ? fmt::format("{}", *input.factor) : "");
  }
  add("options");
  for (const JobOption& option : request.options) {
    if (option.key == "threads") continue;
    add(option.key);
    add(option.value);
  }
  return digest.finish();
}

}  // namespace stanchion
