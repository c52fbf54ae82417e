#include "sim/input/read_flowsheet.hpp"
#include "sim/results/hdf5_file.hpp"
#include "sim/results/result_access.hpp"
#include "tools/leat/solve_case.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

// The kind a file says it is; empty where it does not say, which the solver's reader tells as a fault.
std::string kind_of(const std::string& text, const std::string& file) {
  Diagnostics unused;
  return file_kind(text, file, unused);
}

SolvedCase solve(const CaseSolver& solver, const std::string& text, const std::string& file) {
  Progress progress("through time");
  SolveSettings settings;
  settings.progress = [&](double share) { progress.show(share); };
  settings.stop = stop_asked;
  listen_for_stop();
  return solver.solve(text, file, settings);
}

std::string output_of(const RunArguments& arguments) { return arguments.out.empty() ? default_output(arguments.file, ".h5") : arguments.out; }

// Writes the results, then lays them out: what is not written is not shown.
void take_results(const ResultSet& results, const RunArguments& arguments, Answer& answer) {
  const std::string out = output_of(arguments);
  if (!written(write_result_file(results, out), "results", out, answer)) return;
  answer.title = attribute(results, "title");
  if (!answer.failure.empty()) answer.lines.push_back(answer.failure);
  answer.tables = tables_of(results);
  answer.cautions = lines_of(results, "cautions_in_short");
}

int solve_and_say(const char* verb, const RunArguments& arguments, bool beakers_only) {
  Answer answer;
  answer.verb = verb;
  answer.file = arguments.file;
  Diagnostics reading;
  const std::string text = read_text(arguments.file, reading);
  if (!take_findings(reading, answer)) return say(answer, arguments.manner);
  const std::string kind = kind_of(text, arguments.file);
  if (beakers_only && kind == "flowsheet") {
    answer.exit_code = Exit::input_faults;
    answer.failure = "is a flowsheet; use leat run";
    return say(answer, arguments.manner);
  }
  if (!kind.empty() && !knows_csv(arguments.manner, table_names(kind == "beaker" ? "beaker" : "run"), answer)) return say(answer, arguments.manner);
  if (!may_replace(output_of(arguments), arguments.file, answer)) return say(answer, arguments.manner);
  const CaseSolver solver;
  const SolvedCase solved = solve(solver, text, arguments.file);
  take_findings(solved.diagnostics, answer);
  answer.exit_code = solved.exit;
  answer.failure = solved.failure;
  if (solved.results) take_results(*solved.results, arguments, answer);
  return say(answer, arguments.manner);
}

}  // namespace

int run_verb(const RunArguments& arguments) { return solve_and_say("run", arguments, false); }

int speciate_verb(const RunArguments& arguments) { return solve_and_say("speciate", arguments, true); }

}  // namespace leat
