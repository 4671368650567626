#include "jobs/durable_file.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>

namespace stanchion {
namespace {

Status write_failed(const std::string& path, int error) {
  return Status::resource_limit("write-failed",
                                std::string("the file could not be written: ") + std::strerror(error), path,
                                "check the folder, its permissions and the space on its disk");
}

bool write_all(int file, std::string_view bytes) {
  while (!bytes.empty()) {
    const ssize_t written = ::write(file, bytes.data(), bytes.size());
    if (written < 0 && errno != EINTR) return false;
    if (written > 0) bytes.remove_prefix(static_cast<std::size_t>(written));
  }
  return true;
}

bool flush_folder(const std::string& path) {
  const auto parent = std::filesystem::path(path).parent_path();
  const int folder = ::open(parent.empty() ? "." : parent.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (folder < 0) return false;
  const bool flushed = ::fsync(folder) == 0;
  ::close(folder);
  return flushed;
}

}  // namespace

Status write_durably(const std::string& path, std::string_view bytes) {
  std::string temporary = path + ".XXXXXX";
  const int file = ::mkostemp(temporary.data(), O_CLOEXEC);
  if (file < 0) return write_failed(path, errno);
  int error = 0;
  if (!write_all(file, bytes) || ::fchmod(file, 0644) != 0 || ::fsync(file) != 0) error = errno;
  ::close(file);
  if (error == 0 && std::rename(temporary.c_str(), path.c_str()) != 0) error = errno;
  if (error != 0) {
    ::unlink(temporary.c_str());
    return write_failed(path, error);
  }
  return flush_folder(path) ? Status{} : write_failed(path, errno);
}

std::optional<std::string> read_whole(const std::string& path) {
  const int file = ::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NONBLOCK);
  if (file < 0) return std::nullopt;
  struct stat about {};
  std::optional<std::string> bytes;
  if (::fstat(file, &about) == 0 && S_ISREG(about.st_mode)) {
    bytes.emplace(static_cast<std::size_t>(about.st_size), '\0');
    std::size_t have = 0;
    while (have < bytes->size()) {
      const ssize_t count = ::read(file, bytes->data() + have, bytes->size() - have);
      if (count < 0 && errno == EINTR) continue;
      if (count <= 0) break;
      have += static_cast<std::size_t>(count);
    }
    if (have != bytes->size()) bytes.reset();
  }
  ::close(file);
  return bytes;
}

}  // namespace stanchion
