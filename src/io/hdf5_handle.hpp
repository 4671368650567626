// HDF5 objects that close themselves. Included by the two HDF5 files only.
#pragma once

#include <hdf5.h>

#include <mutex>

namespace stanchion::hdf5 {

/// Owns one identifier; `close` is the function of its kind.
class Handle {
 public:
  Handle(hid_t id, herr_t (*close)(hid_t)) : id_(id), close_(close) {}
  ~Handle() {
    if (id_ >= 0) close_(id_);
  }
  Handle(const Handle&) = delete;
  Handle& operator=(const Handle&) = delete;
  Handle(Handle&& other) noexcept : id_(other.id_), close_(other.close_) { other.id_ = -1; }
  Handle& operator=(Handle&&) = delete;

  bool ok() const { return id_ >= 0; }
  operator hid_t() const { return id_; }  // NOLINT(google-explicit-constructor): handed to the C functions

 private:
  hid_t id_;
  herr_t (*close_)(hid_t);
};

/// The library is not safe for threads, and reports to standard error unless told not to: one caller at a
/// time, silent.
class Session {
 public:
  Session() : lock_(mutex()) { H5Eset_auto2(H5E_DEFAULT, nullptr, nullptr); }

 private:
  static std::mutex& mutex() {
    static std::mutex one;
    return one;
  }
  std::lock_guard<std::mutex> lock_;
};

}  // namespace stanchion::hdf5
