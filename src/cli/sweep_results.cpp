#include "cli/sweep_results.hpp"

#include <cerrno>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <system_error>

#include "cli/certificate_file.hpp"
#include "report/count_journal.hpp"

namespace stanchion::cli {
namespace {

/// What the file holds; empty when it is not there.
std::string content_of(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(file), {}};
}

}  // namespace

Result<std::vector<JournalEntry>> SweepResults::open(const Outcome& begun) {
  const auto support = certify_support_files(request_);
  if (!support.ok()) return support.status();
  std::vector<NamedDigest> files;
  for (const CertifiedFile& file : *support) files.emplace_back(file.role, file.sha256);
  const std::string header = journal_header(request_, begun, files);
  std::string text = content_of(path_);
  auto lines = read_journal(text, header, path_);
  if (!lines.ok()) return lines.status();
  text.erase(text.find_last_of('\n') + 1);  // a line that was cut off
  std::error_code failure;
  if (!text.empty()) std::filesystem::resize_file(path_, text.size(), failure);
  file_ = std::shared_ptr<std::FILE>(
      failure ? nullptr : std::fopen(path_.c_str(), text.empty() ? "we" : "ae"), [](std::FILE* file) {
        if (file != nullptr) std::fclose(file);
      });
  if (!file_) {
    return Status::bad_usage("cannot-write",
                             std::string("the file cannot be written: ") + std::strerror(errno), path_,
                             "name a file in an existing folder that you may write to");
  }
  if (text.empty()) {
    if (Status status = write(header); !status.ok()) return status;
  }
  std::vector<JournalEntry> entries;
  for (JournalLine& line : *lines) {
    entries.push_back({line.number, std::move(line.count), std::move(line.events)});
  }
  return entries;
}

Status SweepResults::record(const JournalEntry& entry) {
  return write(journal_text({entry.number, entry.count, entry.events}));
}

Status SweepResults::write(const std::string& line) {
  const std::string whole = line + "\n";
  const bool written = std::fwrite(whole.data(), 1, whole.size(), file_.get()) == whole.size();
  if (written && std::fflush(file_.get()) == 0) return {};
  return Status::resource_limit("write-failed",
                                std::string("the file could not be written: ") + std::strerror(errno), path_,
                                "name a place that can take it");
}

}  // namespace stanchion::cli
