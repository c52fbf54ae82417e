#include "sim/study/worker_pool.hpp"

#include <poll.h>
#include <sched.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <system_error>

namespace leat {
namespace {

using Seconds = std::chrono::duration<double>;
constexpr int wait_ms = 200;            // longest wait for the workers: how late a stop is seen
constexpr double asleep = 2;            // a wait longer by so much: this process was held up, and so were the workers [s]
constexpr int most_idle_ends = 20;

}  // namespace

int core_count() {
  cpu_set_t set;
  CPU_ZERO(&set);
  if (sched_getaffinity(0, sizeof set, &set) == 0) return std::max(1, CPU_COUNT(&set));
  return static_cast<int>(std::max(1L, sysconf(_SC_NPROCESSORS_ONLN)));
}

std::uint64_t machine_memory() {
  const long pages = sysconf(_SC_PHYS_PAGES), size = sysconf(_SC_PAGESIZE);
  return pages > 0 && size > 0 ? static_cast<std::uint64_t>(pages) * static_cast<std::uint64_t>(size) : 0;
}

WorkerPool::WorkerPool(Work work, const PoolSettings& settings) : work_(std::move(work)), settings_(settings) {
  signal(SIGCHLD, SIG_DFL);  // else nobody tells how a worker ended
  seats_.resize(static_cast<std::size_t>(std::max(1, settings_.workers)));
  fill_seats();
}

std::vector<int> WorkerPool::lines() const {
  std::vector<int> lines;
  for (const Seat& seat : seats_)
    if (seat.worker) lines.push_back(seat.worker->line());
  return lines;
}

void WorkerPool::run(const PoolCalls& calls) {
  std::optional<Clock::time_point> stopped;
  while (true) {
    if (!stopped && calls.stop && calls.stop()) stopped = Clock::now();
    if (!stopped) {
      fill_seats();
      hand_out(calls);
    }
    if (under_way() == 0) return;
    if (stopped && Clock::now() - *stopped > Seconds(settings_.grace)) {
      for (Seat& seat : seats_) {
        if (seat.task == 0) continue;
        seat.task = 0;
        seat.worker.reset();
      }
      return;
    }
    wait_and_read(calls);
    if (calls.tick) calls.tick(under_way());
  }
}

// With fewer than wanted if the machine gives no more at present, but never with none.
void WorkerPool::fill_seats() {
  for (Seat& seat : seats_) {
    if (seat.worker) continue;
    try {
      seat.worker.emplace(work_, settings_.memory);
    } catch (const std::system_error&) {
      if (std::none_of(seats_.begin(), seats_.end(), [](const Seat& other) { return other.worker.has_value(); })) throw;
      return;
    }
  }
}

void WorkerPool::hand_out(const PoolCalls& calls) {
  for (Seat& seat : seats_) {
    if (!seat.worker || seat.task != 0) continue;
    const std::optional<int> task = calls.next();
    if (!task) return;
    seat.task = *task;
    seat.since = Clock::now();
    seat.worker->hand(*task);  // if it is gone, its line closes and the task has an outcome
  }
}

void WorkerPool::wait_and_read(const PoolCalls& calls) {
  std::vector<pollfd> polled;
  std::vector<Seat*> of;
  const auto before = Clock::now();
  double left = wait_ms / 1000.0;
  for (Seat& seat : seats_) {
    if (!seat.worker) continue;
    polled.push_back({seat.worker->line(), POLLIN, 0});
    of.push_back(&seat);
    if (seat.task != 0) left = std::min(left, settings_.time_limit - Seconds(before - seat.since).count());
  }
  if (poll(polled.data(), polled.size(), std::max(0, static_cast<int>(1000 * left) + 1)) < 0 && errno != EINTR)
    throw std::system_error(errno, std::generic_category(), "waiting for workers");
  const auto lost = Clock::now() - before;
  for (std::size_t k = 0; k < of.size(); ++k) {
    if (Seconds(lost).count() > asleep) of[k]->since += lost;  // a sleep of the machine or a stopped job is nobody's time
    look_after(*of[k], calls);
  }
}

// One seat: its answer, its worker's end or its time.
void WorkerPool::look_after(Seat& seat, const PoolCalls& calls) {
  const bool open = seat.worker->receive();  // does not wait; an answer may have come while another's was told
  if (const auto message = seat.worker->message(); message && seat.task != 0) {
    static constexpr TaskOutcome::Ending endings[] = {TaskOutcome::answered, TaskOutcome::threw, TaskOutcome::out_of_memory, TaskOutcome::trouble};
    const TaskOutcome outcome{seat.task, endings[std::clamp<int>(message->kind, 0, 3)], message->text, 0, 0};
    if (!open || message->kind != WorkerMessage::answer) seat.worker.reset();
    return tell(seat, outcome, calls);
  }
  if (!open) return ended(seat, calls);
  if (seat.task == 0 || Seconds(Clock::now() - seat.since).count() < settings_.time_limit) return;
  seat.worker.reset();
  tell(seat, {seat.task, TaskOutcome::timed_out, "", 0, 0}, calls);
}

void WorkerPool::ended(Seat& seat, const PoolCalls& calls) {
  const int status = seat.worker->end();
  seat.worker.reset();
  if (seat.task == 0) {
    if (++idle_ends_ > most_idle_ends) throw std::system_error(ECHILD, std::generic_category(), "workers end as soon as they are started");
    return;
  }
  const bool signalled = WIFSIGNALED(status);
  tell(seat, {seat.task, signalled ? TaskOutcome::signalled : TaskOutcome::left, "", signalled ? WTERMSIG(status) : WEXITSTATUS(status), 0}, calls);
}

void WorkerPool::tell(Seat& seat, TaskOutcome outcome, const PoolCalls& calls) {
  outcome.seconds = Seconds(Clock::now() - seat.since).count();
  seat.task = 0;
  idle_ends_ = 0;
  calls.done(outcome);
}

int WorkerPool::under_way() const {
  return static_cast<int>(std::count_if(seats_.begin(), seats_.end(), [](const Seat& seat) { return seat.task != 0; }));
}

}  // namespace leat
