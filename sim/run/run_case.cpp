#include "sim/run/run_case.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <chrono>
#include <cmath>

#include "sim/run/cautions.hpp"
#include "sim/run/snapshot_maker.hpp"
#include "sim/run/time_system.hpp"

namespace leat {
namespace {

constexpr double absolute_share = 1e-7;  // of a state's scale

void choose_reported(const std::vector<std::string>& metals, RunResult& result) {
  const Circuit& circuit = *result.circuit;
  for (int u : circuit.holding)
    if (!circuit.units[u].torn) result.vessels.push_back(u);
  std::sort(result.vessels.begin(), result.vessels.end());  // as in the file
  const Chemistry& c = *circuit.chemistry;
  for (std::size_t e = 0; e < circuit.elements.size(); ++e) {
    if (!(circuit.fed_solids[e] > 0)) continue;
    bool metal = false;
    for (int j = 0; j < c.component_count(); ++j)
      metal = metal || (c.component_role[j] == ComponentRole::metal && circuit.component_elements[j][e] > 0);
    if (!metals.empty()) metal = std::find(metals.begin(), metals.end(), circuit.elements[e]) != metals.end();
    if (metal) result.recovered.push_back(static_cast<int>(e));
  }
}

std::string steady_failure(const SteadyReport& report, bool has_history) {
  std::string text = "the steady state was not found: " + report.circuit.message;
  if (!report.circuit.worst.empty())
    text += fmt::format("; worst equation {} ({:.2g} of its scale)", report.circuit.worst, report.circuit.largest_residual);
  text += ". Try a larger make-up or bleed, and check that everything fed has a way out";
  return has_history ? text : text + "; a history shows where it goes through time";
}

bool run_steady(RunResult& result, bool has_history, std::vector<double>& y) {
  CircuitEquations equations(result.circuit);
  result.steady_report = solve_steady(equations, y);
  if (!result.steady_report.circuit.ok) {
    result.failure = steady_failure(result.steady_report, has_history);
    return false;
  }
  SnapshotMaker maker(equations, result);
  if (!maker.make(y, 0, nullptr, result.steady)) {
    result.failure = maker.complaint;
    return false;
  }
  const std::string fault = closure_fault(result.steady.closures, false);
  if (!fault.empty()) {
    result.failure = "the steady state does not close: " + fault;
    return false;
  }
  return true;
}

// The state of a timed circuit that starts steady: same vessels, same contents; own states likewise.
std::vector<double> steady_start(const Circuit& steady, const Circuit& timed, const std::vector<double>& y) {
  std::vector<double> start(timed.states, 0.0);
  for (int u : timed.holding) {
    const int from = steady.find_unit(timed.units[u].name);
    std::copy_n(y.begin() + steady.units[from].first_state, timed.units[u].states, start.begin() + timed.units[u].first_state);
  }
  return start;
}

bool run_timed(const HistorySpec& history, std::shared_ptr<const Circuit> circuit, std::vector<double> start,
               const RunOptions& options, RunResult& result) {
  const auto begin = std::chrono::steady_clock::now();
  CircuitEquations equations(circuit, options.finish);
  TimeSystem system(equations, result.recovered);
  std::vector<double> absolute = state_scales(*circuit);
  for (double& one : absolute) one *= absolute_share;
  CvodeSettings settings;
  settings.relative_tolerance = options.relative_tolerance;
  CvodeSolver solver(system, 0, start, absolute, settings);
  CircuitEquations reading(circuit, options.finish);  // its cells do not disturb those of the integration
  SnapshotMaker maker(reading, result);
  const long rows = static_cast<long>(std::ceil(history.until / history.every - 1e-9));
  for (long row = 0; row <= rows; ++row) {
    const double t = std::min(history.until, row * history.every);
    const SolveReport report = solver.advance(t);
    if (!report.ok) {
      // The reason may be in the plain sight of the last state: a vessel run empty.
      std::vector<double> scratch(solver.state().size());
      const std::string objection = reading.rates(solver.state(), scratch) ? reading.objection(solver.state()) : "";
      result.failure = objection.empty() ? report.message : objection + "; " + report.message;
      return false;
    }
    const std::span<const double> z = solver.quadrature();
    Crossed crossed;
    crossed.time = t;
    crossed.left.assign(z.begin(), z.begin() + system.left_size());
    crossed.taken.assign(z.begin() + system.left_size(), z.begin() + system.left_size() + system.ledger_size());
    crossed.family_to_date.assign(z.begin() + system.left_size() + system.ledger_size(), z.end());
    crossed.start = start;
    Snapshot snapshot;
    if (!maker.make(solver.state(), t, &crossed, snapshot)) {
      result.failure = fmt::format("at {:.6g} h, {}", t / 3600, maker.complaint);
      return false;
    }
    const std::string objection = reading.objection(solver.state());
    const std::string fault = row == 0 ? "" : closure_fault(snapshot.closures, true);
    if (!fault.empty() || !objection.empty()) {
      result.failure = fmt::format("at {:.6g} h, {}", t / 3600, objection.empty() ? "the run does not close: " + fault : objection);
      return false;
    }
    result.history.push_back(std::move(snapshot));
    if (options.progress) options.progress(t / history.until);
    if (row < rows && options.stop && options.stop()) {
      result.stopped = true;
      result.failure = fmt::format("stopped at {:.6g} h of {:.6g} h", t / 3600, history.until / 3600);
      break;
    }
  }
  result.statistics = solver.statistics();
  result.time_seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count();
  return !result.stopped;
}

}  // namespace

std::string closure_fault(const Closures& closures, bool timed, const ClosureBounds& bounds) {
  const double balance = timed ? bounds.timed : bounds.steady;
  const auto over = [](const char* what, double found, double bound, const std::string& where) {
    return fmt::format("{} {:.2g} is over its bound {:.0e}{}", what, found, bound, where.empty() ? "" : " (" + where + ")");
  };
  // The comparisons are written so that a NaN is over its bound.
  if (!(closures.elements <= balance)) return over("the balance of elements", closures.elements, balance, closures.worst_element);
  if (!(closures.water <= balance)) return over("the balance of water", closures.water, balance, "");
  if (!(closures.mass <= balance)) return over("the balance of mass", closures.mass, balance, "");
  if (!(closures.charge <= bounds.charge)) return over("the balance of charge", closures.charge, bounds.charge, "");
  if (!(closures.mass_action <= bounds.mass_action)) return over("mass action", closures.mass_action, bounds.mass_action, closures.worst_cell);
  if (!(closures.cell_balance <= bounds.cell_balance)) return over("the balance of a cell", closures.cell_balance, bounds.cell_balance, closures.worst_balance);
  return {};
}

RunResult run_case(const Flowsheet& flowsheet, const BuiltCase& built, const RunOptions& options) {
  RunResult result;
  result.circuit = built.steady;
  result.may_form = built.may_form;
  result.watched = built.watched;
  result.at_equilibrium = built.at_equilibrium;
  result.site_pressure = built.site_pressure;
  choose_reported(built.metals, result);
  std::vector<double> steady;
  result.steady_ok = run_steady(result, built.timed != nullptr, steady);
  const bool from_steady = built.timed && built.start.empty();
  if (built.timed && options.through_time && (result.steady_ok || !from_steady)) {
    result.timed = true;
    const std::string before = result.failure;
    result.failure.clear();
    std::vector<double> start = from_steady ? steady_start(*built.steady, *built.timed, steady) : built.start;
    result.time_ok = run_timed(*flowsheet.history, built.timed, std::move(start), options, result);
    if (!before.empty()) result.failure = result.time_ok ? before : before + "; through time: " + result.failure;
  }
  find_cautions(*built.library, result);
  return result;
}

}  // namespace leat
