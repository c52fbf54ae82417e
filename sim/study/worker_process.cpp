#include "sim/study/worker_process.hpp"

#include <fcntl.h>
#include <signal.h>
#include <sys/prctl.h>
#include <sys/resource.h>
#include <sys/socket.h>
#include <sys/wait.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <new>
#include <stdexcept>
#include <system_error>
#include <utility>
#include <vector>

namespace leat {
namespace {

constexpr std::uint64_t longest_message = 1u << 30;
constexpr int patience_ms = 2000;  // for a worker whose line has closed to be gone

bool send_all(int line, const void* data, std::size_t size) {
  const char* at = static_cast<const char*>(data);
  while (size > 0) {
    const ssize_t sent = send(line, at, size, MSG_NOSIGNAL);
    if (sent < 0 && errno == EINTR) continue;
    if (sent <= 0) return false;
    at += sent;
    size -= static_cast<std::size_t>(sent);
  }
  return true;
}

bool receive_all(int line, void* data, std::size_t size) {
  char* at = static_cast<char*>(data);
  while (size > 0) {
    const ssize_t got = recv(line, at, size, 0);
    if (got < 0 && errno == EINTR) continue;
    if (got <= 0) return false;
    at += got;
    size -= static_cast<std::size_t>(got);
  }
  return true;
}

bool send_message(int line, WorkerMessage::Kind kind, const std::string& text) {
  const std::uint64_t size = text.size() + 1;
  return send_all(line, &size, sizeof size) && send_all(line, &kind, 1) && send_all(line, text.data(), text.size());
}

// All but the first three and the line: what the parent has open is not ours, its locks above all.
void close_others(int line) {
  std::vector<int> open;
  {
    std::error_code error;
    for (std::filesystem::directory_iterator entry("/proc/self/fd", error), none; !error && entry != none; entry.increment(error))
      open.push_back(std::atoi(entry->path().filename().c_str()));
  }
  for (int fd : open)
    if (fd > 2 && fd != line) close(fd);
}

void to_nowhere(int fd, int how) {
  const int nowhere = open("/dev/null", how);
  if (nowhere < 0) return;
  dup2(nowhere, fd);
  if (nowhere != fd) close(nowhere);
}

// No more than so many bytes beyond what is mapped now; and the first to go if the machine runs short all the same.
void limit_memory(std::uint64_t memory) {
  std::ofstream("/proc/self/oom_score_adj") << 1000;
  std::uint64_t field = 0, data = 0;
  std::ifstream statm("/proc/self/statm");
  for (int k = 0; k < 6 && statm >> field; ++k) data = field;  // the sixth: data and stack, in pages
  if (memory == 0 || !statm) return;
  const rlim_t most = data * static_cast<std::uint64_t>(sysconf(_SC_PAGESIZE)) + memory;
  const struct rlimit limit = {most, most};
  setrlimit(RLIMIT_DATA, &limit);
}

std::system_error trouble(const char* what) { return std::system_error(errno, std::generic_category(), what); }

}  // namespace

WorkerProcess::WorkerProcess(const Work& work, std::uint64_t memory) {
  int ends[2];
  if (socketpair(AF_UNIX, SOCK_STREAM | SOCK_CLOEXEC, 0, ends) != 0) throw trouble("no line to a worker");
  std::fflush(nullptr);  // else the worker would carry a copy of what is still to be written
  const int parent = getpid();
  pid_ = fork();
  if (pid_ == 0) live(work, ends[1], parent, memory);
  if (pid_ < 0) {
    const std::system_error why = trouble("no worker can be started");
    close(ends[0]);
    close(ends[1]);
    throw why;
  }
  close(ends[1]);
  line_ = ends[0];
}

void WorkerProcess::live(const Work& work, int line, int parent, std::uint64_t memory) const {
  prctl(PR_SET_PDEATHSIG, SIGKILL);
  if (getppid() != parent) _exit(0);  // it died in between
  signal(SIGINT, SIG_IGN);
  signal(SIGTERM, SIG_DFL);
  signal(SIGPIPE, SIG_IGN);
  close_others(line);
  to_nowhere(0, O_RDONLY);
  to_nowhere(1, O_WRONLY);
  limit_memory(memory);
  int task = 0;
  while (receive_all(line, &task, sizeof task)) {
    WorkerMessage message;
    try {
      message.text = work(task);
    } catch (const std::bad_alloc&) {
      message = {WorkerMessage::out_of_memory, ""};
    } catch (const std::system_error& error) {
      message = {WorkerMessage::trouble, error.what()};
    } catch (const std::exception& error) {
      message = {WorkerMessage::threw, error.what()};
    }
    if (!send_message(line, message.kind, message.text)) break;
    if (message.kind != WorkerMessage::answer) break;  // nobody knows in what state it is
  }
  _exit(0);
}

WorkerProcess::WorkerProcess(WorkerProcess&& other) noexcept
    : pid_(std::exchange(other.pid_, -1)), line_(std::exchange(other.line_, -1)), status_(other.status_), received_(std::move(other.received_)) {}

WorkerProcess::~WorkerProcess() {
  kill();
  if (pid_ > 0) end();
  if (line_ >= 0) close(line_);
}

bool WorkerProcess::hand(int task) { return send_all(line_, &task, sizeof task); }

bool WorkerProcess::receive() {
  char bytes[65536];
  while (true) {
    const ssize_t got = recv(line_, bytes, sizeof bytes, MSG_DONTWAIT);
    if (got > 0) {
      received_.append(bytes, static_cast<std::size_t>(got));
      continue;
    }
    if (got < 0 && errno == EINTR) continue;
    return got < 0 && (errno == EAGAIN || errno == EWOULDBLOCK);
  }
}

std::optional<WorkerMessage> WorkerProcess::message() {
  std::uint64_t size = 0;
  if (received_.size() < sizeof size) return std::nullopt;
  std::memcpy(&size, received_.data(), sizeof size);
  if (size < 1 || size > longest_message) {  // not from our loop: its memory is spoilt
    kill();
    received_.clear();
    return std::nullopt;
  }
  if (received_.size() < sizeof size + size) return std::nullopt;
  WorkerMessage message{static_cast<WorkerMessage::Kind>(received_[sizeof size]), received_.substr(sizeof size + 1, size - 1)};
  received_.erase(0, sizeof size + size);
  return message;
}

void WorkerProcess::kill() {
  if (pid_ > 0) ::kill(pid_, SIGKILL);
}

int WorkerProcess::end() {
  if (pid_ <= 0) return status_;
  int waited = 0;
  while (true) {
    const pid_t ended = waitpid(pid_, &status_, waited < patience_ms ? WNOHANG : 0);
    if (ended == pid_ || (ended < 0 && errno != EINTR)) break;
    usleep(1000);
    if (++waited == patience_ms) kill();
  }
  pid_ = -1;
  return status_;
}

}  // namespace leat
