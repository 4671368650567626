#include "service/roots.hpp"

#include <dirent.h>
#include <fcntl.h>
#include <linux/openat2.h>
#include <sys/stat.h>
#include <sys/syscall.h>

#include <algorithm>
#include <cerrno>
#include <filesystem>
#include <memory>

namespace stanchion::service {
namespace {

bool is_root_name(const std::string& name) {
  return !name.empty() && name.size() <= 64 && std::all_of(name.begin(), name.end(), [](char c) {
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '_' || c == '-';
  });
}

Status bad_root(const std::string& text, const std::string& why) {
  return Status::bad_usage("bad-root", why, "--root " + text,
                           "give NAME=FOLDER, the name of letters, digits, _ and -");
}

Status outside(const std::string& name) {
  return Status::bad_input("outside-roots", "this lies under none of the roots", name,
                           "name a file as ROOT/path; GET /v1/files lists the roots");
}

Status failure_of(int error, const std::string& name) {
  if (error == EXDEV || error == ELOOP) return outside(name);
  if (error == ENOENT || error == ENOTDIR || error == ENAMETOOLONG) {
    return Status::bad_input("file-not-found", "there is no such file", name,
                             "GET /v1/files lists what is there");
  }
  return Status::bad_input("cannot-read", "this cannot be read", name, "look after its permissions");
}

int open_beneath(int folder, const std::string& path, int flags) {
  open_how how{};
  how.flags = static_cast<__u64>(flags | O_CLOEXEC);
  how.resolve = RESOLVE_BENEATH | RESOLVE_NO_MAGICLINKS;
  return static_cast<int>(::syscall(SYS_openat2, folder, path.c_str(), &how, sizeof how));
}

std::int64_t milliseconds(const timespec& time) {
  return std::int64_t{time.tv_sec} * 1000 + time.tv_nsec / 1'000'000;
}

}  // namespace

Result<Roots> Roots::open(const std::vector<std::string>& texts) {
  Roots roots;
  for (const std::string& text : texts) {
    const std::size_t equals = text.find('=');
    std::error_code failure;
    const auto folder =
        std::filesystem::canonical(equals == std::string::npos ? text : text.substr(equals + 1), failure);
    if (failure) return bad_root(text, "there is no such folder");
    const std::string name =
        equals == std::string::npos ? folder.filename().string() : text.substr(0, equals);
    if (!is_root_name(name) || name == "uploads")
      return bad_root(text, "this root has no name that requests could use");
    for (const Root& root : roots.roots_) {
      if (root.name == name) return bad_root(text, "two roots have the name " + name);
    }
    FileHandle handle(::open(folder.c_str(), O_PATH | O_DIRECTORY | O_CLOEXEC));
    if (!handle) return bad_root(text, "this is no folder that can be opened");
    roots.roots_.push_back({name, folder.string(), std::move(handle)});
  }
  if (!roots.roots_.empty()) {
    const FileHandle probe(open_beneath(roots.roots_[0].handle.get(), ".", O_PATH | O_DIRECTORY));
    if (!probe && errno == ENOSYS) {
      return Status::bad_usage("bad-root",
                               "this kernel cannot keep names below a folder (openat2, Linux 5.6)", "--root",
                               "use uploads instead of roots");
    }
  }
  return roots;
}

std::vector<std::string> Roots::names() const {
  std::vector<std::string> names;
  for (const Root& root : roots_) names.push_back(root.name);
  return names;
}

Result<std::string> Roots::name_of(const std::string& path) const {
  if (path.size() > 4096 || path.find('\0') != std::string::npos) return outside("the path");
  const auto normal = std::filesystem::path(path).lexically_normal().string();
  for (const Root& root : roots_) {
    const std::string front = (normal[0] == '/' ? root.folder : root.name) + "/";
    if (normal.size() > front.size() && normal.rfind(front, 0) == 0) {
      return root.name + "/" + normal.substr(front.size());
    }
  }
  return outside(path);
}

Result<FileHandle> Roots::open_below(const std::string& name, int flags) const {
  const std::size_t slash = std::min(name.find('/'), name.size());
  for (const Root& root : roots_) {
    if (name.compare(0, slash, root.name) != 0) continue;
    const std::string rest = name.substr(std::min(slash + 1, name.size()));
    FileHandle handle(open_beneath(root.handle.get(), rest.empty() ? "." : rest, flags));
    if (!handle) return failure_of(errno, name);
    return handle;
  }
  return outside(name);
}

Result<OpenedFile> Roots::open_file(const std::string& name) const {
  auto handle = open_below(name, O_RDONLY | O_NONBLOCK | O_NOCTTY);
  if (!handle.ok()) return handle.status();
  struct stat facts {};
  if (::fstat(handle->get(), &facts) != 0 || !S_ISREG(facts.st_mode)) {
    return Status::bad_input("not-a-file", "this is no regular file", name, "name a file");
  }
  return OpenedFile{std::move(*handle), facts.st_size};
}

Result<FileListing> Roots::list(const std::string& path, std::size_t most) const {
  FileListing listing;
  if (path.empty()) {
    for (const Root& root : roots_) listing.entries.push_back({root.name, root.name, true, {}, {}});
    return listing;
  }
  if (path.find('\0') != std::string::npos) return outside("the path");
  auto normal = std::filesystem::path(path).lexically_normal().string();
  while (normal.size() > 1 && normal.back() == '/') normal.pop_back();
  auto folder = open_below(normal, O_RDONLY | O_DIRECTORY);
  if (!folder.ok()) return folder.status();
  const int handle = folder->release();
  const std::unique_ptr<DIR, int (*)(DIR*)> entries(::fdopendir(handle), &::closedir);
  if (!entries) {
    ::close(handle);
    return failure_of(errno, path);
  }
  listing.path = normal;
  const std::size_t slash = normal.rfind('/');
  listing.parent = slash == std::string::npos ? "" : normal.substr(0, slash);
  while (const dirent* entry = ::readdir(entries.get())) {
    const std::string name = entry->d_name;
    if (name[0] == '.') continue;
    const FileHandle item(open_beneath(handle, name, O_PATH));
    struct stat facts {};
    if (!item || ::fstat(item.get(), &facts) != 0) continue;
    if (!S_ISDIR(facts.st_mode) && !S_ISREG(facts.st_mode)) continue;
    if (listing.entries.size() >= most) {
      listing.truncated = true;
      break;
    }
    const bool is_folder = S_ISDIR(facts.st_mode);
    listing.entries.push_back({name, normal + "/" + name, is_folder,
                               is_folder ? std::nullopt : std::optional<std::int64_t>(facts.st_size),
                               milliseconds(facts.st_mtim)});
  }
  std::sort(listing.entries.begin(), listing.entries.end(), [](const FileEntry& a, const FileEntry& b) {
    return a.is_folder != b.is_folder ? a.is_folder : a.name < b.name;
  });
  return listing;
}

}  // namespace stanchion::service
