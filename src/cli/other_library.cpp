#include "cli/other_library.hpp"

#include <dlfcn.h>

#include <algorithm>
#include <filesystem>
#include <limits>
#include <system_error>

#include "peer/library_count.h"

namespace stanchion::cli {
namespace {

namespace fs = std::filesystem;

/// Where the module lies: the same way from the program in the build folder and once installed.
fs::path module_path() {
  std::error_code failure;
  const fs::path program = fs::read_symlink("/proc/self/exe", failure);
  return failure ? fs::path() : program.parent_path() / STANCHION_MODULES_FROM_PROGRAM / "recheck_mumps.so";
}

}  // namespace

struct OtherLibrary::Module {
  void* handle = nullptr;
  const StanchionPeer* peer = nullptr;
  int most_megabytes = 0;

  ~Module() {
    if (handle != nullptr) dlclose(handle);
  }
};

std::unique_ptr<OtherLibrary> OtherLibrary::find(std::optional<Offset> most_bytes) {
  std::error_code failure;
  const fs::path path = module_path();
  if (path.empty() || !fs::exists(path, failure)) return nullptr;
  auto module = std::make_unique<Module>();
  module->handle = dlopen(path.c_str(), RTLD_NOW | RTLD_LOCAL);
  if (module->handle == nullptr) return nullptr;
  const auto entry = reinterpret_cast<decltype(&stanchion_peer)>(dlsym(module->handle, "stanchion_peer"));
  if (entry == nullptr || entry()->interface_version != STANCHION_PEER_INTERFACE) return nullptr;
  module->peer = entry();
  if (most_bytes) {
    constexpr Offset kMost = std::numeric_limits<int>::max();
    module->most_megabytes = static_cast<int>(std::clamp<Offset>(*most_bytes / 1'000'000, 1, kMost));
  }
  return std::unique_ptr<OtherLibrary>(new OtherLibrary(std::move(module)));
}

OtherLibrary::OtherLibrary(std::unique_ptr<Module> module) : module_(std::move(module)) {}
OtherLibrary::~OtherLibrary() = default;

std::string OtherLibrary::name() const {
  return module_->peer->name;
}
std::string OtherLibrary::version() const {
  return module_->peer->version;
}

Result<Index> OtherLibrary::count_negative(const TripletMatrix& matrix) const {
  // The interface is C and does not change what it is given.
  const StanchionPeerMatrix given{matrix.rows,
                                  static_cast<long long>(matrix.value.size()),
                                  const_cast<int*>(matrix.row.data()),
                                  const_cast<int*>(matrix.column.data()),
                                  const_cast<double*>(matrix.value.data()),
                                  module_->most_megabytes};
  StanchionPeerAnswer answer{};
  module_->peer->count_negative(&given, &answer);
  if (answer.error == 0) return Index{answer.negative};
  return Status::resource_limit("other-library", answer.message, name(), "recheck --with own leaves it out");
}

}  // namespace stanchion::cli
