#include "tools/leat/solve_case.hpp"

#include <fmt/format.h>

#include "models/register/register_models.hpp"
#include "sim/input/read_beaker.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "sim/results/run_layout.hpp"
#include "sim/run/run_case.hpp"
#include "sim/run/speciate.hpp"

namespace leat {
namespace {

constexpr double step_balance_bound = 1e-9, step_action_bound = 1e-8;  // of a beaker's step that is shown

SolvedCase fault_of(Diagnostics diagnostics) {
  SolvedCase solved;
  solved.exit = Exit::input_faults;
  solved.diagnostics = std::move(diagnostics);
  return solved;
}

}  // namespace

CaseSolver::CaseSolver() : library_(load_library()), catalogue_(register_models()) {}

SolvedCase CaseSolver::solve(const std::string& text, const std::string& file, const SolveSettings& settings) const {
  Diagnostics unused;  // the reader of the kind tells the same fault with the rest
  return file_kind(text, file, unused) == "beaker" ? solve_beaker(text, file) : solve_flowsheet(text, file, settings);
}

Diagnostics CaseSolver::faults(const std::string& text, const std::string& file) const {
  Diagnostics diagnostics, unused;
  if (file_kind(text, file, unused) == "beaker") {
    const auto beaker = read_beaker(text, file, catalogue_, diagnostics);
    if (beaker && diagnostics.ok()) speciate(*beaker, library_, catalogue_, diagnostics);
    return diagnostics;
  }
  const auto flowsheet = read_flowsheet(text, file, catalogue_, diagnostics);
  if (flowsheet) build_circuit(*flowsheet, library_, catalogue_, diagnostics);
  return diagnostics;
}

SolvedCase CaseSolver::solve_flowsheet(const std::string& text, const std::string& file, const SolveSettings& settings) const {
  Diagnostics diagnostics;
  const auto flowsheet = read_flowsheet(text, file, catalogue_, diagnostics);
  if (!flowsheet) return fault_of(diagnostics);
  const auto built = build_circuit(*flowsheet, library_, catalogue_, diagnostics);
  if (!built || !diagnostics.ok()) return fault_of(diagnostics);
  SolvedCase solved;
  solved.diagnostics = diagnostics;
  RunOptions options;
  options.progress = settings.progress;
  options.stop = settings.stop;
  options.through_time = settings.through_time;
  const RunResult result = run_case(*flowsheet, *built, options);
  solved.cautions = result.cautions;
  solved.failure = result.failure;
  const bool history_closed = result.timed && (result.time_ok || result.stopped);
  if (!result.steady_ok || (result.timed && !result.time_ok)) solved.exit = result.stopped ? Exit::machine_trouble : Exit::not_solved;
  if (result.timed ? history_closed : result.steady_ok)  // a history that closes is worth having without a steady state
    solved.results = layout_of(result, *built->library, {base_name(file), text, flowsheet->title, program_name()});
  return solved;
}

SolvedCase CaseSolver::solve_beaker(const std::string& text, const std::string& file) const {
  Diagnostics diagnostics;
  const auto beaker = read_beaker(text, file, catalogue_, diagnostics);
  if (!beaker || !diagnostics.ok()) return fault_of(diagnostics);
  const auto result = speciate(*beaker, library_, catalogue_, diagnostics);
  if (!result || !diagnostics.ok()) return fault_of(diagnostics);
  SolvedCase solved;
  solved.diagnostics = diagnostics;
  solved.failure = result->failure;
  for (const BeakerStep& step : result->steps)
    if (solved.failure.empty() && (!(step.closure.balance <= step_balance_bound) || !(step.closure.mass_action <= step_action_bound)))
      solved.failure = fmt::format("step '{}' does not close: balance {:.2g}, mass action {:.2g}", step.name, step.closure.balance, step.closure.mass_action);
  if (!solved.failure.empty()) {
    solved.exit = Exit::not_solved;
    return solved;
  }
  solved.cautions = result->cautions;
  solved.results = layout_of(*result, library_, {base_name(file), text, beaker->title, program_name()});
  return solved;
}

}  // namespace leat
