#include "sim/study/ledger_lock.hpp"

#include <fcntl.h>
#include <fmt/format.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>

#include "sim/study/ledger_trouble.hpp"

namespace leat {
namespace {

// Whether the name still stands for the open file: a holder takes the name away as it ends.
bool still_named(int file, const std::string& path) {
  struct stat open {}, named {};
  return fstat(file, &open) == 0 && stat(path.c_str(), &named) == 0 && open.st_dev == named.st_dev && open.st_ino == named.st_ino;
}

std::string holder(int file) {
  char text[200] = {};
  const ssize_t size = pread(file, text, sizeof text - 1, 0);
  return size > 0 ? fmt::format(" ({})", std::string(text, static_cast<std::size_t>(size))) : "";
}

}  // namespace

LedgerLock::LedgerLock(const std::string& ledger) : path_(ledger + ".lock") {
  while (true) {
    file_ = open(path_.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0666);
    if (file_ < 0) throw LedgerTrouble(LedgerTrouble::machine, fmt::format("{}: {}", path_, std::strerror(errno)));
    if (flock(file_, LOCK_EX | LOCK_NB) != 0) {
      const int why = errno;
      const std::string who = holder(file_);
      close(file_);
      if (why == EWOULDBLOCK)
        throw LedgerTrouble(LedgerTrouble::locked, fmt::format("{}: another campaign is at work on it{}; wait for it or end it", ledger, who));
      throw LedgerTrouble(LedgerTrouble::machine, fmt::format("{}: cannot be locked: {}", path_, std::strerror(why)));
    }
    if (still_named(file_, path_)) break;
    close(file_);
  }
  char host[100] = {};
  gethostname(host, sizeof host - 1);
  const std::string who = fmt::format("process {} on {}", getpid(), host);
  if (ftruncate(file_, 0) != 0 || pwrite(file_, who.data(), who.size(), 0) < 0) {
    // only for the message to others
  }
}

LedgerLock::~LedgerLock() {
  unlink(path_.c_str());
  close(file_);
}

}  // namespace leat
