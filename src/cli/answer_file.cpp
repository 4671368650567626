#include "cli/answer_file.hpp"

#include <sys/stat.h>

#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <system_error>

namespace stanchion::cli {
namespace {

/// The file itself behind links (there or not yet), so that a link to an answer stays a link.
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

Result<AnswerFile> AnswerFile::open(const std::string& path) {
  AnswerFile answer;
  answer.path_ = path;
  answer.target_ = behind_links(path);
  const std::string& target = answer.target_;
  if (!exists_but_not_regular(target)) {
    answer.file_ = std::make_unique<OutputFile>(target, false);
    if (!answer.file_->ok()) return answer.file_->commit();
    return answer;
  }
  if (std::FILE* stream = std::fopen(target.c_str(), "we")) {
    answer.device_ = std::shared_ptr<std::FILE>(stream, std::fclose);
    return answer;
  }
  return Status::bad_usage("cannot-write", std::string("the file cannot be written: ") + std::strerror(errno),
                           path, "name a file in an existing folder that you may write to");
}

void AnswerFile::remove_older() const {
  if (file_) std::remove(target_.c_str());
}

Status AnswerFile::commit(const std::string& text) {
  if (file_) {
    file_->write(text);
    Status status = file_->commit();
    committed_ = status.ok();
    return status;
  }
  const bool written = std::fwrite(text.data(), 1, text.size(), device_.get()) == text.size();
  committed_ = written && std::fflush(device_.get()) == 0;
  if (committed_) return {};
  return Status::resource_limit("write-failed",
                                std::string("the file could not be written: ") + std::strerror(errno), path_,
                                "name a place that can take it");
}

}  // namespace stanchion::cli
