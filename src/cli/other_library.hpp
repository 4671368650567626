// A module that speaks for another library, found beside the program and loaded at run time.
#pragma once

#include <memory>
#include <optional>
#include <string>

#include "model/library_count.hpp"

namespace stanchion::cli {

class OtherLibrary {
 public:
  /// The module for MUMPS, in the place it is built and installed in, relative to the program; null when it
  /// is not there or does not fit this program. `most_bytes`: what it may allocate.
  static std::unique_ptr<OtherLibrary> find(std::optional<Offset> most_bytes);
  ~OtherLibrary();
  OtherLibrary(const OtherLibrary&) = delete;
  OtherLibrary& operator=(const OtherLibrary&) = delete;

  std::string name() const;
  std::string version() const;
  Result<Index> count_negative(const TripletMatrix& matrix) const;

 private:
  struct Module;
  explicit OtherLibrary(std::unique_ptr<Module> module);
  std::unique_ptr<Module> module_;
};

}  // namespace stanchion::cli
