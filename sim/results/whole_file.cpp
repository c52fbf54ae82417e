#include "sim/results/whole_file.hpp"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <filesystem>
#include <random>
#include <system_error>

namespace leat {
namespace {

namespace fs = std::filesystem;

std::string reason(int code) {
  switch (code) {
    case ENOSPC: return "the disk is full";
    case EDQUOT: return "the disk quota is used up";
    case EFBIG: return "the file would be larger than the system allows";
    case EROFS: return "the disk is mounted read-only";
    case EACCES:
    case EPERM: return "no permission to write in the folder";
    case ENOTDIR: return "part of the path is a file, not a folder";
    case ENAMETOOLONG: return "the name is too long";
    default: return std::generic_category().message(code);
  }
}

FileOutcome failure(const std::string& path, const std::string& why) { return {false, path + ": not written: " + why}; }

// The temporary: made new, removed again unless renamed.
class PartialFile {
 public:
  explicit PartialFile(const std::string& path) {
    std::random_device random;
    do {
      char suffix[32];
      std::snprintf(suffix, sizeof suffix, ".partial-%08x%08x", random(), random());
      name_ = path + suffix;
      descriptor_ = ::open(name_.c_str(), O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
    } while (descriptor_ < 0 && errno == EEXIST);
    fault_ = descriptor_ < 0 ? errno : 0;
    remove_ = fault_ == 0;
  }
  ~PartialFile() {
    if (descriptor_ >= 0) ::close(descriptor_);
    if (remove_) ::unlink(name_.c_str());
  }
  PartialFile(const PartialFile&) = delete;
  PartialFile& operator=(const PartialFile&) = delete;

  // Each step answers 0 or the system's error number, and does nothing after a failure.
  int write(std::span<const std::byte> bytes) {
    while (!fault_ && !bytes.empty()) {
      const ssize_t count = ::write(descriptor_, bytes.data(), bytes.size());
      if (count > 0) bytes = bytes.subspan(static_cast<std::size_t>(count));
      else if (count == 0 || errno != EINTR) fault_ = count == 0 ? ENOSPC : errno;
    }
    return fault_;
  }
  int to_disk() {
    if (fault_) return fault_;
    // A file system that cannot force to disk says so with one of these; the write itself went well.
    if (::fsync(descriptor_) != 0 && errno != EINVAL && errno != ENOSYS && errno != ENOTSUP) fault_ = errno;
    if (::close(descriptor_) != 0 && errno != EINTR && !fault_) fault_ = errno;  // some file systems tell only now
    descriptor_ = -1;
    return fault_;
  }
  int rename_to(const std::string& path) {
    if (fault_) return fault_;
    if (::rename(name_.c_str(), path.c_str()) != 0) return fault_ = errno;
    remove_ = false;
    return 0;
  }

 private:
  std::string name_;
  int descriptor_ = -1;
  int fault_ = 0;
  bool remove_ = false;
};

// Makes the rename itself last. When that fails the file is whole and in place all the same.
void folder_to_disk(const fs::path& folder) {
  const int descriptor = ::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC);
  if (descriptor < 0) return;
  ::fsync(descriptor);
  ::close(descriptor);
}

}  // namespace

FileOutcome write_whole_file(const std::string& path, std::span<const std::byte> bytes) {
  const fs::path target(path);
  std::error_code error;
  const fs::file_status status = fs::status(target, error);
  if (fs::is_directory(status)) return failure(path, "it is a folder");
  if (fs::exists(status) && !fs::is_regular_file(status)) return failure(path, "it is a device, not a file");
  if (!target.has_filename()) return failure(path, "it names no file");

  const fs::path folder = target.has_parent_path() ? target.parent_path() : fs::path(".");
  error.clear();
  fs::create_directories(folder, error);
  if (error) return failure(path, "the folder cannot be made: " + reason(error.value()));

  PartialFile partial(path);
  int fault = partial.write(bytes);
  if (!fault) fault = partial.to_disk();
  if (!fault) fault = partial.rename_to(path);
  if (fault) return failure(path, reason(fault));
  folder_to_disk(folder);
  return {true, {}};
}

}  // namespace leat
