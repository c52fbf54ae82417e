// WorkerPool: tasks, known by number, done by worker processes, one at a time each; what a task does to its worker is an
// outcome like any other, and the worker is replaced.
#pragma once

#include <chrono>
#include <cstdint>
#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "sim/study/worker_process.hpp"

namespace leat {

int core_count();                 // cores this process may use
std::uint64_t machine_memory();   // [bytes]

struct PoolSettings {
  int workers = 1;
  double time_limit = 600;        // of one task [s]
  double grace = 2;               // for tasks under way to end after a stop [s]
  std::uint64_t memory = 0;       // of one worker [bytes]; 0: no limit
};

struct TaskOutcome {
  // threw: a fault of the program; trouble: with the machine; left: the worker ended by itself with `code`;
  // signalled: by the signal `code`, not one of ours
  enum Ending { answered, threw, trouble, out_of_memory, timed_out, left, signalled };
  int task = 0;
  Ending ending = answered;
  std::string text;               // the answer, or what was thrown
  int code = 0;
  double seconds = 0;
};

// What a pool is run with. All are called in this process.
struct PoolCalls {
  std::function<std::optional<int>()> next;         // asked whenever a worker is free; nothing: none at present
  std::function<void(const TaskOutcome&)> done;
  std::function<bool()> stop;                       // may be empty
  std::function<void(int under_way)> tick;          // now and then, at least once a second; may be empty
};

class WorkerPool {
 public:
  // Starts the workers, so that they know nothing that happens here later. Throws std::system_error if none can be started.
  WorkerPool(Work work, const PoolSettings& settings);

  // Until `next` has none and all outcomes are told, or a stop; tasks then still under way have no outcome. Throws
  // std::system_error if no worker can be kept alive.
  void run(const PoolCalls& calls);

  std::vector<int> lines() const;  // for tests

 private:
  using Clock = std::chrono::steady_clock;
  struct Seat {
    std::optional<WorkerProcess> worker;
    int task = 0;                 // 0: free
    Clock::time_point since;
  };

  void fill_seats();
  void hand_out(const PoolCalls& calls);
  void wait_and_read(const PoolCalls& calls);
  void look_after(Seat& seat, const PoolCalls& calls);
  void ended(Seat& seat, const PoolCalls& calls);
  void tell(Seat& seat, TaskOutcome outcome, const PoolCalls& calls);
  int under_way() const;

  Work work_;
  PoolSettings settings_;
  std::vector<Seat> seats_;
  int idle_ends_ = 0;             // workers lost one after the other without a task
};

}  // namespace leat
