// WorkerProcess: one process forked from this one that does tasks sent to it over a socket pair, one at a time.
//   isolated: whatever a task does, crash, exit, run away, it does to its own process
//   never an orphan: it ends when the line to this process closes, and is killed by the system when this process dies
//   quiet: it ignores Ctrl-C, which is this process's business, closes every file it does not need, writes nothing to stdout
// This process must have a single thread when it forks.
#pragma once

#include <cstdint>
#include <functional>
#include <optional>
#include <string>

namespace leat {

using Work = std::function<std::string(int task)>;  // in the worker: a task to its answer

// What a worker sends back.
struct WorkerMessage {
  enum Kind : char { answer, threw, out_of_memory, trouble };  // threw: a fault of the program; trouble: std::system_error
  Kind kind = answer;
  std::string text;  // the answer, or what was thrown
};

class WorkerProcess {
 public:
  // memory: bytes it may take beyond what it has at its start; 0: no limit. Throws std::system_error if it cannot be started.
  WorkerProcess(const Work& work, std::uint64_t memory);
  ~WorkerProcess();  // kills it if it still lives
  WorkerProcess(WorkerProcess&& other) noexcept;
  WorkerProcess& operator=(WorkerProcess&&) = delete;

  int line() const { return line_; }          // to poll
  bool hand(int task);                        // false: it is gone
  bool receive();                             // takes in what has come without waiting; false: the line is closed
  std::optional<WorkerMessage> message();     // a whole one, once
  int end();                                  // waits for its end, killing it if it does not come, and gives its wait status
  void kill();

 private:
  [[noreturn]] void live(const Work& work, int line, int parent, std::uint64_t memory) const;

  int pid_ = -1, line_ = -1, status_ = 0;
  std::string received_;
};

}  // namespace leat
