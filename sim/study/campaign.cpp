#include "sim/study/campaign.hpp"

#include <fmt/format.h>
#include <signal.h>
#include <string.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <deque>
#include <filesystem>
#include <optional>
#include <set>
#include <stdexcept>
#include <system_error>

#include "sim/study/campaign_start.hpp"
#include "sim/study/ledger_lock.hpp"
#include "sim/study/worker_pool.hpp"

namespace leat {

namespace files = std::filesystem;

std::string cases_folder(const std::string& ledger) {
  constexpr std::string_view ending = ".ledger";
  return (ledger.ends_with(ending) ? ledger.substr(0, ledger.size() - ending.size()) : ledger) + ".cases";
}
std::string results_file_name(int number) { return fmt::format("{:06}.h5", number); }

namespace {

constexpr int most_troubles = 5;  // cases one after the other that the machine spoilt: then the rest would fare no better
constexpr int most_trials = 10;   // cases looked at for the watched names if the base case is not solved

// Tasks of the pool: a case by its number; below zero a trial, without a file: -1 the base case, -2 case 1, -3 case 2 ...
int trial_of(int number) { return -1 - number; }

class CampaignRunner {
 public:
  CampaignRunner(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings)
      : spec_(spec), work_(work), settings_(settings), pool_([this](int task) { return solve(task); }, pool_settings()) {}

  CampaignOutcome run() {
    const bool is_new = !files::exists(settings_.ledger);
    if (is_new && !know_watched()) return std::move(outcome_);
    make_folder();
    const LedgerLock lock(settings_.ledger);
    CampaignResult wanted = waiting_campaign(spec_, work_, settings_);
    if (is_new && !files::exists(settings_.ledger)) create(wanted);
    ledger_.emplace(settings_.ledger);
    if (!resume(wanted)) return std::move(outcome_);
    wanted = {};
    remove_unfinished();
    pool_.run({[this] { return next(); }, [this](const TaskOutcome& outcome) { take(outcome); }, [this] { return stop(); },
               [this](int under_way) { tell(under_way); }});
    remove_unfinished();
    finish();
    return std::move(outcome_);
  }

 private:
  using Clock = std::chrono::steady_clock;

  PoolSettings pool_settings() const;
  std::string solve(int task) const;
  bool know_watched();
  std::vector<CaseAnswer> trials(const std::vector<int>& numbers);
  void make_folder() const;
  void create(CampaignResult& wanted) const;
  bool resume(const CampaignResult& wanted);
  void remove_unfinished() const;
  std::optional<int> next();
  void take(const TaskOutcome& outcome);
  bool once_more(const TaskOutcome& outcome);
  CaseRecord record_of(const TaskOutcome& outcome);
  void judge(const TaskOutcome& outcome, CampaignCase& row, CaseAnswer& answer) const;
  bool stop() const { return troubles_ >= most_troubles || (settings_.stop && settings_.stop()); }
  void tell(int under_way) const;
  void finish();
  double seconds() const { return std::chrono::duration<double>(Clock::now() - start_).count(); }

  const CampaignSpec& spec_;
  const CampaignWork& work_;
  const CampaignSettings& settings_;
  const Clock::time_point start_ = Clock::now();
  CampaignOutcome outcome_;
  WorkerPool pool_;                   // before the ledger, so that the first workers have nothing of it
  std::optional<Ledger> ledger_;
  std::vector<std::string> units_, meanings_;  // of the watched names, once known
  std::deque<int> waiting_;
  std::set<int> killed_once_;         // cases whose worker somebody ended
  int total_ = 0, finished_ = 0, failed_ = 0, spoilt_ = 0;
  int troubles_ = 0;                  // one after the other
  std::string trouble_;               // the last one
};

PoolSettings CampaignRunner::pool_settings() const {
  const int asked = settings_.workers > 0 ? settings_.workers : core_count();
  const int workers = static_cast<int>(std::min<long long>(asked, case_count(spec_)));
  return {workers, spec_.time_limit, settings_.grace, machine_memory() / static_cast<unsigned>(workers)};
}

// In a worker.
std::string CampaignRunner::solve(int task) const {
  const bool trial = task < 0;
  const int number = trial ? -1 - task : task;
  const std::string text = number == 0 ? spec_.base.text : work_.text(inputs_of(spec_, number));
  const std::string file = spec_.keep_results && !trial ? (files::path(cases_folder(settings_.ledger)) / results_file_name(number)).string() : "";
  return to_bytes(work_.solve(text, file));
}

// Whether all watched names are names of the results, before anything is written. What the base case has not, a case may
// have: a tank more. Where neither the base case nor one of those looked at is solved nobody can tell, and the campaign goes on.
bool CampaignRunner::know_watched() {
  const auto lacks = [](const CaseAnswer& answer) {
    return std::any_of(answer.watched.begin(), answer.watched.end(), [](const WatchedValue& one) { return !one.missing.empty(); });
  };
  std::vector<CaseAnswer> answers = trials({0});
  if (answers.empty() || lacks(answers.front())) {
    const int count = static_cast<int>(case_count(spec_));
    std::set<int> more = {count};
    for (int number = 1; number <= std::min(most_trials, count); ++number) more.insert(number);
    for (CaseAnswer& one : trials({more.begin(), more.end()})) answers.push_back(std::move(one));
  }
  if (stop()) {
    outcome_.ending = CampaignOutcome::stopped;
    outcome_.trouble = "stopped before the first case; nothing was written";
    return false;
  }
  if (answers.empty()) return true;
  for (std::size_t k = 0; k < spec_.watch.size(); ++k) {
    const auto has = std::find_if(answers.begin(), answers.end(), [&](const CaseAnswer& one) { return one.watched[k].missing.empty(); });
    const WatchedValue& found = has == answers.end() ? answers.front().watched[k] : has->watched[k];
    if (has == answers.end()) outcome_.faults.fault(Code::unknown_name, spec_.watch_places[k], found.missing);
    units_.push_back(found.unit);
    meanings_.push_back(found.meaning);
  }
  outcome_.ending = outcome_.faults.ok() ? CampaignOutcome::finished : CampaignOutcome::refused;
  return outcome_.faults.ok();
}

// Those of some cases that are solved, in the order in which they end; number 0 is the base case.
std::vector<CaseAnswer> CampaignRunner::trials(const std::vector<int>& numbers) {
  std::vector<CaseAnswer> found;
  std::size_t at = 0;
  pool_.run({[&]() -> std::optional<int> { return at == numbers.size() ? std::nullopt : std::optional(trial_of(numbers[at++])); },
             [&](const TaskOutcome& outcome) {
               if (outcome.ending != TaskOutcome::answered) return;
               CaseAnswer answer = case_answer(outcome.text);
               if (answer.status == CaseStatus::done && answer.watched.size() == spec_.watch.size()) found.push_back(std::move(answer));
             },
             [this] { return stop(); },
             {}});
  return found;
}

void CampaignRunner::make_folder() const {
  const files::path folder = files::path(settings_.ledger).parent_path();
  std::error_code error;
  if (!folder.empty()) files::create_directories(folder, error);
  if (error) throw LedgerTrouble(LedgerTrouble::machine, fmt::format("{}: {}", folder.string(), error.message()));
}

void CampaignRunner::create(CampaignResult& wanted) const {
  if (!units_.empty()) {
    wanted.watch_units = units_;
    wanted.watch_meanings = meanings_;
  }
  Ledger::create(settings_.ledger, wanted, terms_of(spec_, settings_));
}

// Takes up what the ledger holds, if it is this campaign's.
bool CampaignRunner::resume(const CampaignResult& wanted) {
  std::set<CaseStatus> again = {CaseStatus::machine_trouble};
  if (settings_.retry) again.insert({CaseStatus::crashed, CaseStatus::timed_out});
  const CampaignResult held = ledger_->contents();
  const auto other = differences(held, ledger_->terms(), wanted, terms_of(spec_, settings_), false);
  if (!other.empty()) {
    outcome_.ending = CampaignOutcome::refused;
    outcome_.trouble = fmt::format("{}: is the ledger of another campaign: ", settings_.ledger);
    for (const std::string& one : other) outcome_.trouble += (&one == &other.front() ? "" : "; ") + one;
    outcome_.trouble += ". Move it away, or give this campaign another name with --out";
    ledger_->close();
    return false;
  }
  ledger_->set_facts(wanted);
  ledger_->wait_again(again);
  if (units_.empty() && !held.watch_meanings.empty() && !held.watch_meanings.front().empty()) {
    units_ = held.watch_units;
    meanings_ = held.watch_meanings;
  }
  total_ = static_cast<int>(held.cases.size());
  const files::path folder = files::path(settings_.ledger).parent_path();
  std::vector<int> gone;  // their results file is not there any more
  for (const CampaignCase& one : held.cases)
    if (!one.results_file.empty() && !files::exists(folder / one.results_file)) gone.push_back(one.number);
  ledger_->wait_again(gone);
  for (const CampaignCase& one : held.cases) {
    if (one.status == CaseStatus::waiting || again.contains(one.status) || std::binary_search(gone.begin(), gone.end(), one.number)) {
      waiting_.push_back(one.number);
    } else {
      ++finished_;
      failed_ += one.status == CaseStatus::done ? 0 : 1;
    }
  }
  return true;
}

// Halves of results files that a killed worker left. Nobody else writes there: the ledger is locked.
void CampaignRunner::remove_unfinished() const {
  std::error_code error;
  for (const auto& entry : files::directory_iterator(cases_folder(settings_.ledger), error)) {
    std::error_code unused;
    if (entry.path().filename().string().find(".h5.partial-") != std::string::npos) files::remove(entry.path(), unused);
  }
}

std::optional<int> CampaignRunner::next() {
  if (waiting_.empty()) return std::nullopt;
  const int number = waiting_.front();
  waiting_.pop_front();
  return number;
}

void CampaignRunner::take(const TaskOutcome& outcome) {
  if (once_more(outcome)) return;
  const CaseRecord record = record_of(outcome);
  ledger_->record(record);
  const CaseStatus status = record.row.status;
  const bool spoilt = status == CaseStatus::machine_trouble;
  troubles_ = spoilt ? troubles_ + 1 : 0;
  if (spoilt) trouble_ = record.row.reason;
  spoilt_ += spoilt ? 1 : 0;
  ++finished_;
  failed_ += status == CaseStatus::done ? 0 : 1;
  ++outcome_.solved_now;
}

// A worker that somebody else ended says nothing about its case, the first time.
bool CampaignRunner::once_more(const TaskOutcome& outcome) {
  const bool from_outside = outcome.ending == TaskOutcome::signalled && (outcome.code == SIGKILL || outcome.code == SIGTERM || outcome.code == SIGHUP);
  if (!from_outside) return false;
  if (!stop() && !killed_once_.insert(outcome.task).second) return false;
  waiting_.push_back(outcome.task);
  return true;
}

CaseRecord CampaignRunner::record_of(const TaskOutcome& outcome) {
  CaseRecord record;
  CampaignCase& row = record.row;
  CaseAnswer answer;
  row.number = outcome.task;
  row.seconds = outcome.seconds;
  judge(outcome, row, answer);
  row.reason_group = reason_group(row.reason);
  if (answer.file_written) row.results_file = (files::path(cases_folder(settings_.ledger)).filename() / results_file_name(row.number)).string();
  for (const WatchedValue& one : answer.watched) {
    row.watched.push_back(one.value);
    record.missing.push_back(one.missing);
  }
  row.cautions = answer.cautions;
  row.watched.resize(spec_.watch.size(), std::numeric_limits<double>::quiet_NaN());
  record.missing.resize(spec_.watch.size());
  const auto named = [](const WatchedValue& one) { return one.missing.empty(); };
  if (units_.empty() && !answer.watched.empty() && std::all_of(answer.watched.begin(), answer.watched.end(), named)) {
    for (const WatchedValue& one : answer.watched) {
      units_.push_back(one.unit);
      meanings_.push_back(one.meaning);
    }
    ledger_->set_watched(units_, meanings_);
  }
  return record;
}

// The reason reads the same on every machine and at every time: it is part of the digest.
void CampaignRunner::judge(const TaskOutcome& outcome, CampaignCase& row, CaseAnswer& answer) const {
  const auto is = [&](CaseStatus status, std::string reason) {
    row.status = status;
    row.reason = std::move(reason);
  };
  switch (outcome.ending) {
    case TaskOutcome::answered:
      try {
        answer = case_answer(outcome.text);
      } catch (const std::logic_error&) {
        return is(CaseStatus::crashed, "its answer cannot be read");
      }
      if (answer.status != CaseStatus::done) answer.watched.clear();
      return is(answer.status, answer.status == CaseStatus::done ? "" : answer.reason);
    case TaskOutcome::threw: return is(CaseStatus::crashed, "a fault of leat itself: " + outcome.text);
    case TaskOutcome::trouble: return is(CaseStatus::machine_trouble, outcome.text);
    case TaskOutcome::out_of_memory: return is(CaseStatus::crashed, "out of memory");
    case TaskOutcome::timed_out: return is(CaseStatus::timed_out, fmt::format("took longer than {:.6g} s", spec_.time_limit));
    case TaskOutcome::left: return is(CaseStatus::crashed, fmt::format("its process ended by itself with exit code {}", outcome.code));
    case TaskOutcome::signalled:
      return is(CaseStatus::crashed, fmt::format("its process was ended {}by signal {} ({})", killed_once_.contains(outcome.task) ? "twice " : "", outcome.code,
                                                 strsignal(outcome.code)));
  }
}

void CampaignRunner::tell(int under_way) const {
  if (settings_.progress) settings_.progress({total_, finished_, failed_, under_way, outcome_.solved_now, seconds()});
}

void CampaignRunner::finish() {
  tell(0);
  const bool all = finished_ == total_;
  if (troubles_ >= most_troubles) {
    outcome_.ending = CampaignOutcome::machine_trouble;
    outcome_.trouble = fmt::format("{} cases one after the other met trouble with the machine, the last: {}", troubles_, trouble_);
  } else if (!all) {
    outcome_.ending = CampaignOutcome::stopped;
    outcome_.trouble = fmt::format("stopped with {} of {} cases finished; started again it goes on from there", finished_, total_);
  } else if (spoilt_ > 0) {
    outcome_.ending = CampaignOutcome::machine_trouble;
    outcome_.trouble = fmt::format("{} case{} met trouble with the machine, the last: {}; started again {} solved", spoilt_, spoilt_ == 1 ? "" : "s", trouble_,
                                   spoilt_ == 1 ? "it is" : "they are");
  }
  ledger_->set_digest(ledger_->contents().digest);
  ledger_->close();
  outcome_.seconds = seconds();
  outcome_.workers = static_cast<int>(pool_.lines().size());
}

}  // namespace

CampaignOutcome run_campaign(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings) {
  CampaignOutcome outcome;
  if (case_count(spec) > most_cases) {
    outcome.ending = CampaignOutcome::refused;
    outcome.faults.fault(Code::out_of_range, {spec.file, 0, 0, "vary"}, fmt::format("makes more than {} cases", most_cases));
    return outcome;
  }
  try {
    return CampaignRunner(spec, work, settings).run();
  } catch (const LedgerTrouble& trouble) {
    outcome.ending = trouble.kind() == LedgerTrouble::not_a_ledger ? CampaignOutcome::refused : CampaignOutcome::machine_trouble;
    outcome.trouble = trouble.what();
  } catch (const std::system_error& error) {
    outcome.ending = CampaignOutcome::machine_trouble;
    outcome.trouble = error.what();
  }
  return outcome;
}

}  // namespace leat
