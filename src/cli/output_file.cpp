#include "cli/output_file.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <filesystem>
#include <system_error>
#include <utility>

namespace stanchion::cli {
namespace {

/// The file itself behind links (there or not yet), so that a link to a result file stays a link.
std::string behind_links(const std::string& path) {
  constexpr int kMostLinks = 40;
  std::filesystem::path target = path;
  std::error_code failure;
  for (int links = 0; links < kMostLinks && std::filesystem::is_symlink(target, failure); ++links) {
    const auto next = std::filesystem::read_symlink(target, failure);
    target = next.is_absolute() ? next : target.parent_path() / next;
  }
  return target.string();
}

bool exists_but_not_regular(const std::string& path) {
  struct stat about {};
  return stat(path.c_str(), &about) == 0 && !S_ISREG(about.st_mode);
}

}  // namespace

Result<OutputFile> OutputFile::open(const std::string& option, const std::string& path) {
  OutputFile file;
  file.target_ = behind_links(path);
  int descriptor = -1;
  if (exists_but_not_regular(file.target_)) {
    descriptor = ::open(file.target_.c_str(), O_WRONLY | O_CLOEXEC);
  } else {
    file.temporary_ = fmt::format("{}.part-{}", file.target_, getpid());
    descriptor = ::open(file.temporary_.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0666);
  }
  if (descriptor < 0) {
    const int error = errno;
    file.temporary_.clear();
    return Status::bad_usage("cannot-write", fmt::format("cannot write {}: {}", path, std::strerror(error)),
                             option, "name a file in an existing folder that you may write to");
  }
  file.stream_ = fdopen(descriptor, "w");
  return file;
}

OutputFile::OutputFile(OutputFile&& other) noexcept
    : stream_(std::exchange(other.stream_, nullptr)),
      target_(std::move(other.target_)),
      temporary_(std::exchange(other.temporary_, {})) {}

OutputFile& OutputFile::operator=(OutputFile&& other) noexcept {
  discard();
  stream_ = std::exchange(other.stream_, nullptr);
  target_ = std::move(other.target_);
  temporary_ = std::exchange(other.temporary_, {});
  return *this;
}

OutputFile::~OutputFile() {
  discard();
}

void OutputFile::discard() {
  if (stream_ != nullptr) std::fclose(std::exchange(stream_, nullptr));
  if (!temporary_.empty()) unlink(temporary_.c_str());
  temporary_.clear();
}

Status OutputFile::commit(const std::string& text) {
  bool good = stream_ != nullptr && std::fwrite(text.data(), 1, text.size(), stream_) == text.size();
  good = good && std::fflush(stream_) == 0;
  if (good && !temporary_.empty()) good = fsync(fileno(stream_)) == 0;
  if (good) good = std::fclose(std::exchange(stream_, nullptr)) == 0;
  if (good && !temporary_.empty()) good = std::rename(temporary_.c_str(), target_.c_str()) == 0;
  if (good) {
    temporary_.clear();
    return {};
  }
  const int error = errno;
  discard();
  return Status::resource_limit(
      "write-failed", fmt::format("writing failed: {}", std::strerror(error)), target_,
      "free space on the disk or name another place; no half-written file was left");
}

}  // namespace stanchion::cli
