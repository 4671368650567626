#include "base/mapped_file.hpp"

#include <fcntl.h>
#include <sys/mman.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <utility>

namespace stanchion {
namespace {

/// Closes a descriptor at the end of its scope.
struct Descriptor {
  int number;
  ~Descriptor() {
    if (number >= 0) ::close(number);
  }
};

Status system_refusal(const std::string& path) {
  const int error = errno;
  if (error == ENOENT || error == ENOTDIR) {
    return Status::bad_input("file-not-found", "there is no such file", path,
                             "check the name and the working directory");
  }
  return Status::bad_input("not-readable", std::string("the file cannot be read: ") + std::strerror(error),
                           path, "check the permissions of the file");
}

}  // namespace

Result<MappedFile> MappedFile::open(const std::string& path) {
  // O_NONBLOCK: a pipe nobody writes to must be refused, not waited for.
  const Descriptor file{::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NONBLOCK)};
  if (file.number < 0) return system_refusal(path);
  struct stat facts {};
  if (::fstat(file.number, &facts) != 0) return system_refusal(path);
  if (!S_ISREG(facts.st_mode)) {
    return Status::bad_input("not-a-file", "this is a directory, a pipe or a device, not a file", path,
                             "name a regular file; write piped data to a file first");
  }
  MappedFile mapped;
  if (facts.st_size == 0) return mapped;
  const auto size = static_cast<std::size_t>(facts.st_size);
  void* memory = ::mmap(nullptr, size, PROT_READ, MAP_PRIVATE, file.number, 0);
  if (memory == MAP_FAILED) return system_refusal(path);
  ::madvise(memory, size, MADV_WILLNEED);
  mapped.data_ = static_cast<const char*>(memory);
  mapped.size_ = size;
  return mapped;
}

MappedFile::~MappedFile() {
  if (data_ != nullptr) ::munmap(const_cast<char*>(data_), size_);
}

MappedFile::MappedFile(MappedFile&& other) noexcept
    : data_(std::exchange(other.data_, nullptr)), size_(std::exchange(other.size_, 0)) {}

MappedFile& MappedFile::operator=(MappedFile&& other) noexcept {
  std::swap(data_, other.data_);
  std::swap(size_, other.size_);
  return *this;
}

}  // namespace stanchion
