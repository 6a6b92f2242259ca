#include "coordinator/store/place.hpp"

#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <sys/sysmacros.h>
#include <sys/vfs.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <cstring>
#include <fstream>
#include <sstream>
#include <string>
#include <utility>

namespace holdfast::coordinator {
namespace {

// f_type of statfs(2): the kernel's linux/magic.h and the file systems' own documentation.
constexpr std::array<std::uint64_t, 15> kNetworkMagics = {
    0x6969,      // NFS
    0x517B,      // SMB
    0xFF534D42,  // CIFS
    0xFE534D42,  // SMB2
    0x01021997,  // 9P
    0x5346414F,  // AFS
    0x6B414653,  // kAFS
    0x73757245,  // Coda
    0x564C,      // NCP
    0x00C36400,  // Ceph
    0x0BD00BD0,  // Lustre
    0x47504653,  // GPFS
    0x19830326,  // BeeGFS
    0x01161970,  // GFS2
    0x7461636F,  // OCFS2
};
constexpr std::array<std::string_view, 14> kNetworkTypes = {
    "nfs",    "nfs4",       "cifs",      "smb3",           "9p",        "afs",         "ceph",
    "lustre", "fuse.sshfs", "fuse.s3fs", "fuse.glusterfs", "fuse.ceph", "fuse.rclone", "fuse.davfs"};

/// The type of the mount that a device belongs to: "ext4", "fuse.sshfs"; empty if not found.
std::string mountType(dev_t device) {
  std::ifstream mounts("/proc/self/mountinfo");
  const std::string wanted = std::to_string(major(device)) + ":" + std::to_string(minor(device));
  // proc(5): 36 35 98:0 /root /mnt rw,noatime master:1 - ext3 /dev/root rw
  for (std::string line; std::getline(mounts, line);) {
    std::istringstream fields(line);
    std::string id, parent, numbers, field;
    fields >> id >> parent >> numbers;
    if (numbers != wanted) continue;
    while (fields >> field && field != "-") {
    }
    if (fields >> field) return field;
  }
  return "";
}

std::filesystem::path folderOf(const std::filesystem::path& file) {
  const std::filesystem::path folder = file.parent_path();
  return folder.empty() ? std::filesystem::path(".") : folder;
}

}  // namespace

bool isNetworkFileSystem(std::uint64_t magic, std::string_view type) {
  return std::ranges::find(kNetworkMagics, magic) != kNetworkMagics.end() ||
         std::ranges::find(kNetworkTypes, type) != kNetworkTypes.end();
}

Status checkPlace(const std::filesystem::path& file) {
  const std::filesystem::path folder = folderOf(file);
  struct stat status {};
  if (stat(folder.c_str(), &status) != 0 || !S_ISDIR(status.st_mode))
    return Error{"store " + file.string() + ": there is no folder " + folder.string() + "; make it first"};
  if (std::error_code ignored; std::filesystem::is_directory(file, ignored))
    return Error{"store " + file.string() + ": this is a folder; name a file"};
  struct statfs system {};
  if (statfs(folder.c_str(), &system) != 0)
    return Error{"store " + file.string() + ": " + std::strerror(errno)};
  // f_type is a signed word on some machines: its 32 bits count.
  const auto magic = static_cast<std::uint64_t>(static_cast<std::uint32_t>(system.f_type));
  if (isNetworkFileSystem(magic, mountType(status.st_dev)))
    return Error{"store " + file.string() + ": " + folder.string() +
                 " is on a network file system, where a store cannot be kept safe; name a file on a disk of "
                 "this machine and copy it when the study is complete"};
  return success();
}

StoreLock::StoreLock(std::filesystem::path file, int descriptor)
    : file_(std::move(file)), descriptor_(descriptor) {}

StoreLock::StoreLock(StoreLock&& other) noexcept
    : file_(std::move(other.file_)), descriptor_(std::exchange(other.descriptor_, -1)) {}

StoreLock& StoreLock::operator=(StoreLock&& other) noexcept {
  std::swap(file_, other.file_);
  std::swap(descriptor_, other.descriptor_);
  return *this;
}

StoreLock::~StoreLock() {
  if (descriptor_ < 0) return;
  // Removed while it is still held: who opened it meanwhile sees that the name is gone (take) and starts
  // anew.
  unlink(file_.c_str());
  close(descriptor_);
}

Result<StoreLock> StoreLock::take(const std::filesystem::path& store) {
  std::filesystem::path file = store;
  file += ".lock";
  for (;;) {
    const int descriptor = open(file.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0644);
    if (descriptor < 0)
      return Error{"store " + store.string() + ": cannot write its lock " + file.string() + " (" +
                   std::strerror(errno) + "); the folder must be writable for you"};
    if (flock(descriptor, LOCK_EX | LOCK_NB) != 0) {
      std::array<char, 32> owner{};
      const ssize_t length = read(descriptor, owner.data(), owner.size() - 1);
      close(descriptor);
      return Error{"store " + store.string() + " is in use" +
                   (length > 0 ? " by process " + std::string(owner.data()) : std::string()) +
                   "; end that coordinator first, or name another file"};
    }
    struct stat held {
    }, there{};
    if (fstat(descriptor, &held) == 0 && stat(file.c_str(), &there) == 0 && held.st_ino == there.st_ino &&
        held.st_dev == there.st_dev) {
      const std::string owner = std::to_string(getpid());
      // Only words for the message above: a full disk does no harm here.
      if (ftruncate(descriptor, 0) == 0 &&
          pwrite(descriptor, owner.data(), owner.size(), 0) != static_cast<ssize_t>(owner.size()))
        errno = 0;
      return StoreLock(file, descriptor);
    }
    close(descriptor);
  }
}

}  // namespace holdfast::coordinator
