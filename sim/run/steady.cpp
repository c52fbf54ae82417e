#include "sim/run/steady.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>

#include "sim/numerics/cvode.hpp"
#include "sim/numerics/kinsol.hpp"
#include "sim/run/time_system.hpp"

namespace leat {
namespace {

constexpr int first_sweeps = 2, round_sweeps = 4, more_rounds = 5;
constexpr double close_by = 1e-3;            // scaled residual from which plain Newton steps arrive [1]
constexpr double rounding = 1e-8;            // scaled residual below which a stop is one of rounding: the closure of the result is judged afterwards [1]
constexpr double transient_turnovers = 30;  // of the whole hold-up, in the fallback
constexpr double torn_lag = 20;             // a torn stream follows within a second; rings of them within this [s]

// One stage at fixed inlet.
class StageProblem final : public NonlinearProblem {
 public:
  StageProblem(CircuitEquations& equations, int unit) : equations_(equations), unit_(unit), inlet_(equations.circuit().context->layout.size()) {}
  std::span<double> inlet() { return inlet_; }
  int size() const override { return equations_.circuit().units[unit_].states; }
  bool residual(std::span<const double> x, std::span<double> f) override {
    if (equations_.unit_rates(unit_, x, inlet_, f)) return true;
    complaint = equations_.complaint;
    return false;
  }
  bool jacobian(std::span<const double> x, std::span<double> values) override { return equations_.unit_jacobian(unit_, x, values); }
  std::string equation_name(int row) const override {
    return state_name(equations_.circuit(), equations_.circuit().units[unit_].first_state + row);
  }

 private:
  CircuitEquations& equations_;
  int unit_;
  std::vector<double> inlet_;
};

// All vessels at once.
class CircuitProblem final : public NonlinearProblem {
 public:
  explicit CircuitProblem(CircuitEquations& equations) : equations_(equations) {}
  int size() const override { return equations_.size(); }
  bool residual(std::span<const double> x, std::span<double> f) override {
    if (equations_.rates(x, f)) return true;
    complaint = equations_.complaint;
    return false;
  }
  bool jacobian(std::span<const double> x, std::span<double> values) override { return equations_.jacobian(x, values); }
  const SparsityPattern* pattern() const override { return &equations_.pattern(); }
  std::string equation_name(int row) const override { return state_name(equations_.circuit(), row); }

 private:
  CircuitEquations& equations_;
};

struct Scales {
  std::vector<double> unknown, residual, positive;
};

Scales scales_of(const Circuit& circuit) {
  const std::vector<double> size = state_scales(circuit);
  const PulpLayout& layout = circuit.context->layout;
  Scales scales;
  scales.unknown.resize(circuit.states);
  scales.residual.resize(circuit.states);
  scales.positive.assign(circuit.states, 0.0);
  for (int u : circuit.holding) {
    const CircuitUnit& unit = circuit.units[u];
    for (int k = 0; k < unit.states; ++k) {
      const int at = unit.first_state + k;
      scales.unknown[at] = 1 / size[at];
      double typical = circuit.flow_scale / 10;  // of an own state: d(flow)/dt over its lag
      if (k <= layout.components) typical = circuit.component_scale[k] * circuit.flow_scale;
      else if (k < layout.size()) typical = circuit.lot_scale[k - layout.components - 1] * circuit.flow_scale;
      scales.residual[at] = 1 / typical;
      if (k < layout.size() && k != circuit.chemistry->hydrogen) scales.positive[at] = 1;
    }
  }
  return scales;
}

double pulp_volume(const Circuit& circuit, std::span<const double> pulp, double temperature) {
  const PulpLayout& layout = circuit.context->layout;
  if (!(pulp[layout.water()] > 0)) return 0;
  double volume = circuit.chemistry->liquor_volume.volume(temperature, pulp.first(layout.components + 1), {});
  for (int k = 0; k < layout.lots; ++k) volume += circuit.context->lots[k].molar_volume * pulp[layout.lot(k)];
  return volume;
}

SolveReport sweep(CircuitEquations& equations, std::vector<double>& y, const Scales& scales, bool first) {
  const Circuit& circuit = equations.circuit();
  SolveReport worst;
  worst.ok = true;
  for (int u : circuit.holding) {
    const CircuitUnit& unit = circuit.units[u];
    StageProblem problem(equations, u);
    if (!equations.refresh_passing()) {
      worst.ok = false;
      worst.message = equations.complaint;
      return worst;
    }
    equations.inlet_of(u, problem.inlet());
    std::span<double> x(y.data() + unit.first_state, unit.states);
    const double temperature = unit.operation->temperature();
    const double flow = pulp_volume(circuit, problem.inlet(), temperature);
    if (!(flow > 0)) continue;  // nothing reaches it yet: a later sweep or the whole circuit will
    if (first) {
      const double hold_up = unit.torn ? 1 : unit.operation->live_volume() / flow;
      for (int k = 0; k < circuit.context->layout.size(); ++k) x[k] = problem.inlet()[k] * hold_up;
      for (int k = circuit.context->layout.size(); k < unit.states; ++k) x[k] = flow;
    }
    KinsolSolver solver(problem);
    KinsolSettings settings;
    settings.tolerance = 1e-9;
    const auto part = [&](const std::vector<double>& all) { return std::span<const double>(all).subspan(unit.first_state, unit.states); };
    const std::vector<double> before(x.begin(), x.end());
    const SolveReport report = solver.solve(x, settings, part(scales.unknown), part(scales.residual), part(scales.positive));
    worst.iterations += report.iterations;
    if (!report.ok) {
      worst.ok = false;
      worst.message = unit.name + ": " + report.message;
      worst.worst = report.worst;
      if (!std::isfinite(report.largest_residual)) std::copy(before.begin(), before.end(), x.begin());
    }
    std::vector<double> scratch(unit.states);
    equations.unit_rates(u, x, problem.inlet(), scratch);
  }
  return worst;
}

SolveReport whole(CircuitEquations& equations, std::vector<double>& y, const Scales& scales) {
  CircuitProblem problem(equations);
  if (y.empty()) {  // nothing holds anything: flows follow one another
    SolveReport report;
    report.ok = equations.rates(y, {});
    report.message = equations.complaint;
    return report;
  }
  KinsolSolver solver(problem);
  KinsolSettings settings;
  settings.tolerance = 1e-11;
  settings.most_iterations = 200;
  const std::vector<double> begun = y;
  SolveReport report = solver.solve(y, settings, scales.unknown, scales.residual, scales.positive);
  if (!report.ok && !std::isfinite(report.largest_residual)) y = begun;  // where nothing can be evaluated nothing can go on
  if (report.ok || !(report.largest_residual < close_by)) return report;
  // Near the solution a content that is used up (oxygen of a starved tank) lies on its constraint and stops every step:
  // the last ones are taken without, and looked at afterwards.
  const std::vector<double> before = y;
  settings.line_search = false;
  SolveReport last = solver.solve(y, settings, scales.unknown, scales.residual);
  last.iterations += report.iterations;
  for (std::size_t k = 0; k < y.size() && last.ok; ++k)
    if (scales.positive[k] > 0 && y[k] * scales.unknown[k] < -1e-12) last.ok = false;
  if (last.ok) return last;
  // Where a vessel exchanges far more gas than its liquor carries, the last digits of the transfer stand above the tolerance.
  y = before;
  report.ok = report.largest_residual < rounding;
  return report;
}

// The long way: let time pass from where the last attempt ended.
bool pass_time(CircuitEquations& equations, std::vector<double>& y) {
  const Circuit& circuit = equations.circuit();
  double horizon = 0;
  for (int u : circuit.holding)
    horizon += transient_turnovers * (circuit.units[u].torn ? torn_lag : circuit.units[u].operation->live_volume() / circuit.flow_scale);
  TimeSystem system(equations, {});
  std::vector<double> absolute = state_scales(circuit);
  for (double& one : absolute) one *= 1e-6;
  CvodeSettings settings;
  settings.relative_tolerance = 1e-4;
  settings.most_steps = 20000;
  CvodeSolver solver(system, 0, y, absolute, settings);
  if (!solver.advance(horizon).ok) return false;
  std::copy(solver.state().begin(), solver.state().end(), y.begin());
  return true;
}

}  // namespace

std::vector<double> state_scales(const Circuit& circuit) {
  const PulpLayout& layout = circuit.context->layout;
  std::vector<double> scales(circuit.states, 1.0);
  for (int u : circuit.holding) {
    const CircuitUnit& unit = circuit.units[u];
    const double volume = unit.torn ? circuit.flow_scale : unit.operation->live_volume();
    for (int k = 0; k < unit.states; ++k) {
      double& scale = scales[unit.first_state + k];
      if (k <= layout.components) scale = circuit.component_scale[k] * volume;
      else if (k < layout.size()) scale = circuit.lot_scale[k - layout.components - 1] * volume;
      else scale = circuit.flow_scale;
    }
  }
  return scales;
}

std::string state_name(const Circuit& circuit, int state) {
  const PulpLayout& layout = circuit.context->layout;
  for (int u : circuit.holding) {
    const CircuitUnit& unit = circuit.units[u];
    const int k = state - unit.first_state;
    if (k < 0 || k >= unit.states) continue;
    if (k <= layout.components) return unit.name + ": " + circuit.chemistry->total_names[k];
    if (k < layout.size()) return unit.name + ": " + circuit.context->lots[k - layout.components - 1].name;
    return unit.name + ": " + unit.operation->traits().state_names[k - layout.size()];
  }
  return "state " + std::to_string(state);
}

SteadyReport solve_steady(CircuitEquations& equations, std::vector<double>& y) {
  const auto begin = std::chrono::steady_clock::now();
  const Circuit& circuit = equations.circuit();
  const Scales scales = scales_of(circuit);
  SteadyReport report;
  equations.forget();
  y.assign(circuit.states, 0.0);
  // A vessel that nothing reaches in the first sweep starts with a trace of everything rather than with nothing.
  const std::vector<double> size = state_scales(circuit);
  for (std::size_t k = 0; k < y.size(); ++k) y[k] = 1e-3 * size[k];
  for (int u : circuit.holding) {
    double& h = y[circuit.units[u].first_state + circuit.chemistry->hydrogen];
    double charge = 0;
    for (int j = 0; j < circuit.chemistry->component_count(); ++j)
      if (j != circuit.chemistry->hydrogen) charge += circuit.chemistry->component_charge[j] * y[circuit.units[u].first_state + j];
    h = -charge;
  }
  for (report.sweeps = 0; report.sweeps < first_sweeps; ++report.sweeps)
    report.stages = sweep(equations, y, scales, report.sweeps == 0);
  report.circuit = whole(equations, y, scales);
  // Metals fill the returns only slowly: sweeps are cheap beside letting time pass.
  for (int round = 0; round < more_rounds && !report.circuit.ok && !y.empty(); ++round) {
    for (int k = 0; k < round_sweeps; ++k, ++report.sweeps) report.stages = sweep(equations, y, scales, false);
    report.circuit = whole(equations, y, scales);
  }
  if (!report.circuit.ok && !y.empty() && pass_time(equations, y)) {
    report.through_time = true;
    report.circuit = whole(equations, y, scales);
  }
  if (!report.circuit.ok && !report.stages.ok && report.stages.message.find("not finite") != std::string::npos)
    report.circuit.message = report.stages.message;  // what a later vessel says of it is a consequence
  if (report.circuit.ok) {
    std::vector<double> rates(y.size());
    equations.rates(y, rates);
    const std::string objection = equations.objection(y);
    if (!objection.empty()) {
      report.circuit.ok = false;
      report.circuit.message = objection;
    }
  }
  report.seconds = std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count();
  return report;
}

}  // namespace leat
