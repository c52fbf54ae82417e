#include <fmt/format.h>
#include <unistd.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <map>

#include "sim/input/case_text.hpp"
#include "sim/input/read_study.hpp"
#include "sim/results/campaign_tables.hpp"
#include "sim/results/hdf5_file.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/run_layout.hpp"
#include "sim/study/campaign.hpp"
#include "sim/study/ledger.hpp"
#include "tools/leat/solve_case.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

// One case, in a worker.
CaseAnswer solve_one(const CaseSolver& solver, const CampaignSpec& spec, const std::string& text, const std::string& results_file) {
  SolveSettings settings;
  settings.through_time = spec.through_time;
  const SolvedCase solved = solver.solve(text, base_name(spec.base.file), settings);
  CaseAnswer answer;
  answer.reason = solved.failure;
  if (solved.exit == Exit::input_faults) {
    answer.status = CaseStatus::input_fault;
    answer.reason = reason_of(solved.diagnostics);
  } else if (solved.exit != Exit::done) {
    answer.status = solved.exit == Exit::machine_trouble ? CaseStatus::machine_trouble : CaseStatus::not_solved;
  }
  if (!solved.results) return answer;
  for (const std::string& line : lines_of(*solved.results, "cautions_in_short")) answer.cautions += line + "\n";
  if (!results_file.empty()) {
    const FileOutcome outcome = write_result_file(*solved.results, results_file);
    answer.file_written = outcome.ok;
    if (!outcome.ok) {
      answer.status = CaseStatus::machine_trouble;
      answer.reason = outcome.message;
    }
  }
  for (const std::string& name : spec.watch) {
    WatchedValue watched;
    if (const auto found = find_value(*solved.results, name, watched.missing)) watched = {found->value, found->units, found->long_name, ""};
    answer.watched.push_back(std::move(watched));
  }
  return answer;
}

constexpr std::size_t most_checked = 200;  // values of one input that are tried before the start

std::string duration(double seconds) {
  if (seconds < 90) return fmt::format("{:.0f} s", seconds);
  if (seconds < 90 * 60) return fmt::format("{:.0f} min", seconds / 60);
  return fmt::format("{:.1f} h", seconds / 3600);
}

// How far it is, on stderr: on a terminal one line that changes, else a line each tenth and once in ten minutes.
class Teller {
 public:
  void tell(const CampaignProgress& at) {
    if (at.total == 0) return;
    const double rate = at.seconds > 0 ? at.finished_now / at.seconds : 0;
    std::string text = fmt::format("{} of {} cases, {} failed", at.finished, at.total, at.failed);
    if (rate > 0) text += fmt::format(", {:.3g} a second, {} left", rate, duration((at.total - at.finished) / rate));
    if (isatty(STDERR_FILENO) != 0) return terminal_.say(fmt::format("{:<76}", text));
    const int tenth = 10 * at.finished / at.total;
    if (tenth_ >= 0 && tenth == tenth_ && at.seconds - told_at_ < 600) return;
    tenth_ = tenth;
    told_at_ = at.seconds;
    tell_text(fmt::format("campaign {}\n", text));
  }

 private:
  Progress terminal_{"campaign"};
  int tenth_ = -1;
  double told_at_ = 0;
};

// Watched names that solved cases do not have: how many of them, and why the first.
void add_missing(const Ledger& ledger, const CampaignResult& campaign, Answer& answer) {
  const auto missing = ledger.missing();
  for (const std::string& name : campaign.watch) {
    int count = 0;
    std::string first;
    for (const auto& [at, why] : missing) {
      if (at.second != name) continue;
      if (count++ == 0) first = fmt::format("case {}: {}", at.first, why);
    }
    if (count > 0) answer.cautions.push_back(fmt::format("{} has no value in {} solved case{}; {}", name, count, count == 1 ? "" : "s", first));
  }
}

// What the ledger holds now, for the answer.
void add_contents(const std::string& path, const Manner& manner, Answer& answer) {
  const Ledger ledger(path, false);
  const CampaignResult campaign = ledger.contents();
  answer.title = campaign.title;
  answer.tables = tables_of(campaign);
  if (!manner.json && manner.csv.empty()) answer.tables.pop_back();  // all cases: for machines
  const auto count = [&](CaseStatus status) { return std::count_if(campaign.cases.begin(), campaign.cases.end(), [&](const auto& one) { return one.status == status; }); };
  const auto done = count(CaseStatus::done), waiting = count(CaseStatus::waiting);
  const auto total = static_cast<std::ptrdiff_t>(campaign.cases.size());
  answer.lines.insert(answer.lines.begin(), fmt::format("{}{} of {} cases finished, {} done and {} not", campaign.shard.empty() ? "" : "shard " + campaign.shard + ": ",
                                                        total - waiting, total, done, total - waiting - done));
  answer.lines.push_back("digest of all rows " + campaign.digest);
  if (waiting > 0) answer.lines.push_back(fmt::format("{} case{} waiting; started again, the campaign does {}", waiting, waiting == 1 ? " is" : "s are", waiting == 1 ? "it" : "them"));
  if (done == 0 && waiting == 0 && total > 0 && answer.exit_code == Exit::done) {
    answer.exit_code = Exit::not_solved;
    answer.failure = "not one case was solved";
  }
  add_missing(ledger, campaign, answer);
  answer.cautions.insert(answer.cautions.end(), campaign.cautions.begin(), campaign.cautions.end());
  answer.written.emplace_back("ledger", path);
  std::error_code unused;
  if (std::filesystem::is_directory(cases_folder(path), unused)) answer.written.emplace_back("results files of the cases", cases_folder(path));
}

// The shard and the merging that were asked for; a fault of usage if they make no sense.
bool read_settings(const CampaignArguments& arguments, CampaignSettings& settings, Answer& answer) {
  if (!arguments.shard.empty()) {
    const auto shard = read_shard(arguments.shard);
    if (!shard) answer.failure = fmt::format("--shard {}: write for example 2/3, the second of three parts", arguments.shard);
    if (shard && !arguments.merge.empty()) answer.failure = "--shard and --merge do not go together: a merged ledger is of all cases";
    if (shard) settings.shard = *shard;
  }
  const std::string part = settings.shard.whole() ? "" : fmt::format(".{}-of-{}", settings.shard.index, settings.shard.of);
  settings.ledger = arguments.out.empty() ? default_output(arguments.file, part + ".ledger") : arguments.out;
  settings.program = program_identity();
  settings.results_format = format_version;
  settings.workers = arguments.workers;
  settings.retry = arguments.retry;
  settings.stop = stop_asked;
  if (!answer.failure.empty()) answer.exit_code = Exit::usage;
  return answer.failure.empty() && knows_csv(arguments.manner, table_names("campaign"), answer);
}

void take_outcome(const CampaignOutcome& outcome, bool merged, Answer& answer) {
  take_findings(outcome.faults, answer);
  answer.failure = outcome.trouble;
  switch (outcome.ending) {
    case CampaignOutcome::finished: break;
    case CampaignOutcome::refused: answer.exit_code = Exit::input_faults; break;
    case CampaignOutcome::stopped:
    case CampaignOutcome::machine_trouble: answer.exit_code = Exit::machine_trouble; break;
  }
  if (merged) answer.lines.push_back(fmt::format("{} rows taken from the ledgers", outcome.solved_now));
  if (!merged && outcome.solved_now > 0)
    answer.lines.push_back(fmt::format("{} of them now, in {} with {} worker{}: {:.3g} cases/s", outcome.solved_now, duration(outcome.seconds), outcome.workers,
                                       outcome.workers == 1 ? "" : "s", outcome.solved_now / std::max(outcome.seconds, 1e-3)));
}

// Values that cannot stand where they go, each tried alone in the base case: a unit left out, a word unknown. What only goes
// wrong together with others (shares that pass 100 %) is the case's own fault, and its row's.
void check_values(const CampaignSpec& spec, const CaseText& base, const CaseSolver& solver, Diagnostics& faults) {
  std::map<std::string, std::pair<Place, std::vector<std::string>>> values;
  for (const VariedInput& one : spec.grid) values[one.path] = {one.place, one.values};
  for (const Inputs& row : spec.listed)
    for (const auto& [path, value] : row) {
      auto& [place, listed] = values[path];
      place.file = spec.file;
      if (listed.size() < most_checked && std::find(listed.begin(), listed.end(), value) == listed.end()) listed.push_back(value);
    }
  for (const auto& [path, of] : values)
    for (std::size_t k = 0; k < std::min(of.second.size(), most_checked); ++k) {
      const std::pair<std::string, std::string> input{path, of.second[k]};
      const Diagnostics found = solver.faults(base.with({&input, 1}), base_name(spec.base.file));
      for (const Diagnostic& fault : found.faults())
        if (fault.place.key == path) {
          Place place = of.first;
          place.key = path;
          faults.fault(fault.code, place, fmt::format("'{}': {}", of.second[k], fault.text));
        }
    }
}

CampaignOutcome solve_all(const CampaignSpec& spec, const CaseText& base, CampaignSettings& settings, const CampaignArguments& arguments) {
  const CaseSolver solver;
  CampaignOutcome outcome;
  check_values(spec, base, solver, outcome.faults);
  if (!outcome.faults.ok()) {
    outcome.ending = CampaignOutcome::refused;
    return outcome;
  }
  CampaignWork work;
  work.text = [&](const Inputs& inputs) { return base.with(inputs); };
  work.solve = [&](const std::string& text, const std::string& results_file) { return solve_one(solver, spec, text, results_file); };
  if (!arguments.merge.empty()) return merge_campaign(spec, work, settings, arguments.merge);
  Teller teller;
  settings.progress = [&](const CampaignProgress& at) { teller.tell(at); };
  listen_for_stop();
  return run_campaign(spec, work, settings);
}

}  // namespace

int campaign_verb(const CampaignArguments& arguments) {
  Answer answer;
  answer.verb = "campaign";
  answer.file = arguments.file;
  CampaignSettings settings;
  if (!read_settings(arguments, settings, answer)) return say(answer, arguments.manner);
  Diagnostics reading;
  const std::string text = read_text(arguments.file, reading);
  const auto spec = reading.ok() ? read_campaign(text, arguments.file, reading) : std::nullopt;
  const auto base = spec ? CaseText::read(spec->base.text, spec->base.file, reading) : std::nullopt;
  if (!take_findings(reading, answer) || !spec || !base) return say(answer, arguments.manner);
  const CampaignOutcome outcome = solve_all(*spec, *base, settings, arguments);
  take_outcome(outcome, !arguments.merge.empty(), answer);
  const bool ours = outcome.ending == CampaignOutcome::finished || outcome.ending == CampaignOutcome::stopped || outcome.solved_now > 0;
  try {
    if (ours && std::filesystem::exists(settings.ledger)) add_contents(settings.ledger, arguments.manner, answer);
  } catch (const LedgerTrouble& trouble) {
    if (answer.exit_code == Exit::done) answer.exit_code = Exit::machine_trouble;
    if (answer.failure.empty()) answer.failure = trouble.what();
  }
  return say(answer, arguments.manner);
}

}  // namespace leat
