// Where a store may stand, and that one coordinator alone uses it.
#pragma once

#include <cstdint>
#include <filesystem>
#include <string_view>

#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// Whether files there are reached over a network: SQLite's write-ahead log needs memory shared by all its
/// readers, and locks that hold. `magic` is f_type of statfs(2); `type` the type in /proc/self/mountinfo,
/// which tells apart what stands behind FUSE ("fuse.sshfs").
bool isNetworkFileSystem(std::uint64_t magic, std::string_view type);

/// Fails if the folder is missing or on a network file system.
Status checkPlace(const std::filesystem::path& file);

/// Held as long as the object lives: an exclusive flock(2) on FILE.lock beside the store. Not on the store
/// itself, because closing any descriptor of a file drops SQLite's own locks on it. The kernel drops the lock
/// when the process ends, however it ends; a lock file left behind means nothing.
class StoreLock {
 public:
  /// The Error names the process that has the store.
  static Result<StoreLock> take(const std::filesystem::path& store);
  StoreLock(StoreLock&& other) noexcept;
  StoreLock& operator=(StoreLock&& other) noexcept;
  ~StoreLock();

 private:
  StoreLock(std::filesystem::path file, int descriptor);
  std::filesystem::path file_;
  int descriptor_ = -1;
};

}  // namespace holdfast::coordinator
