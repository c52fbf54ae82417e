#include "sim/equilibrium/solver_work.hpp"

#include <algorithm>
#include <cmath>

namespace leat {
namespace {

constexpr double tight = 1e-12;           // of the largest residual, asked of every solve
constexpr double acceptable = 1e-10;      // where rounding stops the last decimals
constexpr double step_cap = 4;            // on ln activity and ln of arguments
constexpr double phase_gone = -1e-9;      // of sigma
constexpr double phase_due = 1e-9;        // saturation per unit of stoichiometry
constexpr double identified = 1e-3;       // of sigma: a pseudo-species that counts as a solid

}  // namespace

bool EquilibriumSolver::Work::factor() {
  const int n = size();
  jacobian.resize(n, n);
  system.jacobian(x, active, {jacobian.data(), static_cast<std::size_t>(n) * n});
  lu.compute(jacobian);
  return true;
}

double EquilibriumSolver::Work::shortened(double cap, double residual) {
  const int n = size();
  trial = x;
  for (int halving = 0; halving < 12; ++halving, cap /= 2) {
    for (int i = 0; i < n; ++i) x[i] = trial[i] + cap * step[i];
    double worst = 1e300;
    if (system.evaluate(x, active)) {
      system.residual(x, active, f);
      worst = 0;
      for (int i = 0; i < n; ++i) worst = std::max(worst, std::isfinite(f[i]) ? std::abs(f[i]) : 1e300);
    }
    if (worst <= 5 * residual) break;
  }
  x = trial;
  return cap;
}

SolveReport EquilibriumSolver::Work::newton_own(bool careful) {
  SolveReport report;
  const int n = size();
  f.assign(n, 0.0);
  double best = 1e300;
  int stalled = 0;
  for (report.iterations = 0; report.iterations < (careful ? 300 : 80); ++report.iterations) {
    ++report.evaluations;
    if (!system.evaluate(x, active)) {
      report.message = "a value left the range of numbers";
      return report;
    }
    system.residual(x, active, f);
    int worst = 0;
    for (int i = 0; i < n; ++i)
      if (!(std::abs(f[i]) <= std::abs(f[worst]))) worst = i;
    report.largest_residual = std::abs(f[worst]);
    if (!std::isfinite(report.largest_residual)) {
      report.message = "a value is not finite";
      return report;
    }
    report.worst = system.equation_name(worst, active);
    if (report.largest_residual < tight) {
      report.ok = true;
      return report;
    }
    stalled = report.largest_residual < 0.9 * best ? 0 : stalled + 1;
    best = std::min(best, report.largest_residual);
    if (stalled >= 2 && report.largest_residual < acceptable) {
      report.ok = true;
      return report;
    }
    factor();
    ++newton_total;
    step.resize(n);
    for (int i = 0; i < n; ++i) step[i] = -f[i];
    step = lu.solve(step).eval();
    double largest = 0;
    for (int i = 0; i + 1 < system.head(); ++i) largest = std::max(largest, std::abs(step[i]));
    largest = std::max(largest, 4 * std::abs(step[system.head() - 1]));
    if (!std::isfinite(largest) || !step.allFinite()) {
      report.message = "the Jacobian is singular: solids or equations depend on one another";
      return report;
    }
    const double most = careful ? 1 : step_cap;
    double cap = largest > most ? most / largest : 1;
    if (careful) cap = shortened(cap, report.largest_residual);
    for (int i = 0; i < n; ++i) x[i] += cap * step[i];
  }
  report.message = "too many iterations";
  return report;
}

SolveReport EquilibriumSolver::Work::newton_kinsol() {
  problem.active = active;
  const int n = size();
  auto found = kinsol.find(n);
  if (found == kinsol.end()) found = kinsol.emplace(n, KinsolSolver(problem)).first;
  KinsolSettings settings;
  settings.tolerance = tight;
  settings.most_iterations = 60;
  settings.most_evaluations = 400;
  SolveReport report = found->second.solve(x, settings);
  newton_total += report.iterations;
  if (!report.ok && report.largest_residual > 0 && report.largest_residual < acceptable) report.ok = true;
  return report;
}

SolveReport EquilibriumSolver::Work::settle(bool own, bool careful) {
  SolveReport report;
  for (int change = 0; change < 40; ++change) {
    before = x;
    SolveReport one = own ? newton_own(careful) : newton_kinsol();
    if (!one.ok && !own) {  // a line search can stop short where plain Newton steps arrive
      x = before;
      one = newton_own(careful);
    }
    report.iterations += one.iterations;
    report.evaluations += one.evaluations;
    report.largest_residual = one.largest_residual;
    report.worst = one.worst;
    report.message = one.message;
    if (!one.ok) return report;
    if (!own && !system.evaluate(x, active)) return report;
    int worst = -1;
    double lowest = phase_gone;
    for (std::size_t a = 0; a < active.size(); ++a)
      if (active[a] < system.solids() && x[system.head() + a] < lowest) lowest = x[system.head() + a], worst = static_cast<int>(a);
    if (worst >= 0) {
      x.erase(x.begin() + system.head() + worst);
      active.erase(active.begin() + worst);
      continue;
    }
    int due = -1;
    double highest = phase_due;
    for (int s = 0; s < system.solids(); ++s) {
      if (!system.chemistry().phases[s].may_form || std::find(active.begin(), active.end(), s) != active.end()) continue;
      double size = std::abs(system.phase_water(s));
      for (const Share& share : system.phase_shares(s)) size += std::abs(share.coefficient);
      const double omega = system.ln_omega(s, x) / size;
      if (omega > highest && system.sigma(s) > 1e-13) highest = omega, due = s;
    }
    if (due < 0) {
      report.ok = true;
      return report;
    }
    const auto place = std::lower_bound(active.begin(), active.end(), due);
    x.insert(x.begin() + system.head() + (place - active.begin()), 0.0);
    active.insert(place, due);
  }
  report.message = "the set of solids does not settle";
  return report;
}

SolveReport EquilibriumSolver::Work::cold() {
  SolveReport report;
  bool candidates = system.phases() > system.solids();
  for (int s = 0; s < system.solids(); ++s) candidates = candidates || system.chemistry().phases[s].may_form;
  double steepness = 1, tolerance = finish == Finish::kinsol ? 1e-3 : 0.3;
  convex.start();
  for (int stage = 0; stage < 7; ++stage, steepness *= 8) {
    if (stage > 2) tolerance = 1e-3;
    const bool ok = convex.converge(steepness, tolerance);
    report.evaluations += convex.evaluations;
    convex.evaluations = 0;
    if (!ok) report.message = "the balances at frozen activity did not converge";
    convex.update_activity();
    if (candidates && stage < 2) continue;
    const SolveReport one = from_convex(stage > 2);
    report.iterations += one.iterations;
    report.evaluations += one.evaluations;
    report.largest_residual = one.largest_residual;
    report.worst = one.worst;
    report.message = one.message;
    if (one.ok) {
      report.ok = true;
      return report;
    }
  }
  return report;
}

SolveReport EquilibriumSolver::Work::from_convex(bool careful) {
  active.clear();
  x.assign(convex.lambda.begin(), convex.lambda.end());
  x.insert(x.end(), convex.ln_argument.begin(), convex.ln_argument.end());
  x.push_back(convex.w);
  for (int s = 0; s < system.phases(); ++s)
    if (s >= system.solids() || convex.phase_amount(s) > identified * system.sigma(s)) {
      active.push_back(s);
      x.push_back(convex.phase_amount(s) / system.sigma(s));
    }
  return settle(finish == Finish::own, careful);
}

void EquilibriumSolver::Work::keep(EquilibriumState& state) {
  const Chemistry& c = system.chemistry();
  state.solved = true;
  state.x = x;
  state.active = active;
  state.molality.assign(system.molality().begin(), system.molality().end());
  state.phase_amount.assign(system.phases(), 0.0);
  for (std::size_t a = 0; a < active.size(); ++a)
    state.phase_amount[active[a]] = x[system.head() + a] * system.sigma(active[a]) * system.scale();
  for (int s = 0; s < system.solids(); ++s) state.phase_amount[s] = std::max(0.0, state.phase_amount[s]);
  state.log10_omega.resize(system.solids());
  for (int s = 0; s < system.solids(); ++s) state.log10_omega[s] = system.ln_omega(s, x) / std::log(10.0);
  state.solvent = std::exp(x[system.components() + system.arguments()]) * system.scale();
  state.ionic_strength = std::exp(x[system.components()]);
  state.ph = c.hydrogen >= 0 ? -x[c.hydrogen] / std::log(10.0) : 7;
  state.water_activity = std::exp(system.ln_water());
}

}  // namespace leat
