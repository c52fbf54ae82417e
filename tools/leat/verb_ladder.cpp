#include <fmt/format.h>

#include <algorithm>
#include <filesystem>
#include <span>
#include <sstream>

#include "sim/input/case_text.hpp"
#include "sim/input/read_study.hpp"
#include "sim/results/hdf5_file.hpp"
#include "sim/results/ladder_layout.hpp"
#include "sim/results/page.hpp"
#include "sim/results/result_access.hpp"
#include "tools/leat/solve_case.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

// The rungs of a ladder, solved one by one, each cold from the text of its case, as a run of that case alone would be.
class Climb {
 public:
  explicit Climb(const LadderSpec& ladder) : ladder_(ladder) {
    for (const LadderSeries& one : ladder.series) planned_ += one.vary.values.size();
  }

  void run() {
    Progress progress("ladder");
    const CaseSolver solver;
    listen_for_stop();
    for (const LadderSeries& series : ladder_.series) {
      rungs_.emplace_back();
      Diagnostics unused;  // the text was read before
      const auto text = CaseText::read(series.base.text, series.base.path, unused);
      for (const std::string& value : series.vary.values) {
        if (stop_asked()) break;
        progress.say(fmt::format("rung {} of {}", done_ + 1, planned_));
        const std::pair<std::string, std::string> input{series.vary.path, value};
        take(solver.solve(text->with({&input, 1}), base_name(series.base.path), {.through_time = false, .progress = {}, .stop = {}}));
      }
    }
  }

  const std::vector<std::vector<LadderRung>>& rungs() const { return rungs_; }
  std::size_t planned() const { return planned_; }
  std::size_t done() const { return done_; }
  std::size_t solved() const { return solved_; }
  bool all_faults() const { return done_ > 0 && faults_ == done_; }
  const std::string& read_step() const { return read_step_; }  // of the first beaker; empty for circuits
  const Diagnostics& first_findings() const { return first_findings_; }
  const std::string& first_reason() const { return first_reason_; }

 private:
  void take(const SolvedCase& solved) {
    LadderRung rung;
    if (solved.exit == Exit::done && solved.results && has_step(*solved.results)) {
      rung.status = "solved";
      rung.results = solved.results;
      rung.cautions = solved.cautions;
      if (const TextTable* steps = find_texts(*solved.results, "step_name"); steps && read_step_.empty())
        read_step_ = ladder_.step.empty() ? steps->values.back() : ladder_.step;
      ++solved_;
    } else if (solved.exit == Exit::input_faults) {
      rung.status = "input_fault";
      rung.reason = reason_of(solved.diagnostics);
      if (faults_++ == 0) first_findings_ = solved.diagnostics;
    } else {
      rung.status = "not_solved";
      rung.reason = solved.exit == Exit::done ? fmt::format("there is no step '{}' in this rung", ladder_.step) : solved.failure;
    }
    if (first_reason_.empty()) first_reason_ = rung.reason;
    rungs_.back().push_back(std::move(rung));
    ++done_;
  }

  // A rung may rename the step that is read.
  bool has_step(const ResultSet& results) const {
    const TextTable* names = find_texts(results, "step_name");
    return !names || ladder_.step.empty() || std::find(names->values.begin(), names->values.end(), ladder_.step) != names->values.end();
  }

  const LadderSpec& ladder_;
  std::vector<std::vector<LadderRung>> rungs_;
  std::size_t planned_ = 0, done_ = 0, solved_ = 0, faults_ = 0;
  Diagnostics first_findings_;
  std::string first_reason_, read_step_;
};

std::string output_of(const LadderArguments& arguments) {
  return arguments.out.empty() ? default_output(arguments.file, ".ladder.h5") : arguments.out;
}

// Writes the ladder and its page, then lays it out: what is not written is not shown.
void take_ladder(const LadderSpec& ladder, const Climb& climb, const LadderArguments& arguments, Answer& answer) {
  const bool stopped = climb.done() < climb.planned();
  const std::string early = stopped ? fmt::format("stopped: {} of {} rungs were looked at", climb.done(), climb.planned()) : "";
  const ResultSet results = layout_of(ladder, climb.rungs(), program_name(), early);
  const std::string out = output_of(arguments);
  if (!written(write_result_file(results, out), "results", out, answer)) return;
  answer.title = attribute(results, "title");
  answer.tables = tables_of(results);
  if (!climb.read_step().empty()) answer.lines.push_back(fmt::format("Beakers are read after the step '{}'.", climb.read_step()));
  if (climb.solved() < climb.done())
    answer.cautions.push_back(fmt::format("{} of {} rungs are not solved; the table failures says why", climb.done() - climb.solved(), climb.done()));
  for (std::string& line : lines_of(results, "cautions_in_short")) answer.cautions.push_back(std::move(line));
  if (stopped) {
    answer.exit_code = Exit::machine_trouble;
    answer.failure = early;
  }
  if (!page_available()) return;
  const std::string page = page_of(results);
  written(write_whole_file(page_beside(out), std::as_bytes(std::span(page))), "page", page_beside(out), answer);
}

}  // namespace

int ladder_verb(const LadderArguments& arguments) {
  Answer answer;
  answer.verb = "ladder";
  answer.file = arguments.file;
  Diagnostics reading;
  const std::string text = read_text(arguments.file, reading);
  if (!take_findings(reading, answer)) return say(answer, arguments.manner);
  const auto ladder = arguments.vary.empty() ? read_ladder(text, arguments.file, reading) : ladder_of_case(text, arguments.file, arguments.vary, reading);
  if (!take_findings(reading, answer) || !knows_csv(arguments.manner, table_names("ladder"), answer)) return say(answer, arguments.manner);
  if (!may_replace(output_of(arguments), arguments.file, answer)) return say(answer, arguments.manner);
  Climb climb(*ladder);
  climb.run();
  if (climb.solved() > 0) {
    take_ladder(*ladder, climb, arguments, answer);
  } else if (climb.done() < climb.planned()) {
    answer.exit_code = Exit::machine_trouble;
    answer.failure = "stopped before a rung was solved; nothing was written";
  } else if (climb.all_faults()) {
    take_findings(climb.first_findings(), answer);
  } else {
    answer.exit_code = Exit::not_solved;
    answer.failure = fmt::format("no rung is solved; the first: {}", climb.first_reason());
  }
  return say(answer, arguments.manner);
}

}  // namespace leat
