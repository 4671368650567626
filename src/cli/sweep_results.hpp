// The file of --results: every count of a sweep as it comes, and taken up again by the next run.
#pragma once

#include <cstdio>
#include <memory>
#include <string>

#include "engine/pipeline.hpp"

namespace stanchion::cli {

/// Lines are flushed one by one, so that a killed sweep loses at most the counts it was at.
class SweepResults : public CountJournal {
 public:
  /// `request` outlives the object. Nothing is opened yet.
  SweepResults(std::string path, const Request& request) : path_(std::move(path)), request_(request) {}

  /// Bad usage "cannot-write", or what read_journal() says.
  Result<std::vector<JournalEntry>> open(const Outcome& begun) override;

  /// Resource limit "write-failed".
  Status record(const JournalEntry& entry) override;

 private:
  Status write(const std::string& line);

  std::string path_;
  const Request& request_;
  std::shared_ptr<std::FILE> file_;
};

}  // namespace stanchion::cli
