#include "sim/equilibrium/equilibrium_solver.hpp"

#include <Eigen/LU>
#include <algorithm>
#include <array>
#include <cmath>
#include <map>

#include "models/core/check.hpp"
#include "sim/equilibrium/convex_phase.hpp"
#include "sim/numerics/kinsol.hpp"

namespace leat {
namespace {

constexpr double tight = 1e-12;           // of the largest residual, asked of every solve
constexpr double acceptable = 1e-10;      // where rounding stops the last decimals
constexpr double step_cap = 4;            // on ln activity and ln of arguments
constexpr double phase_gone = -1e-9;      // of sigma
constexpr double phase_due = 1e-9;        // saturation per unit of stoichiometry
constexpr double identified = 1e-3;       // of sigma: a pseudo-species that counts as a solid

}  // namespace

// The exact equations for a fixed active set, as KINSOL sees them.
class FixedSetProblem final : public NonlinearProblem {
 public:
  EquilibriumSystem* system = nullptr;
  std::vector<int> active;
  int size() const override { return system->head() + static_cast<int>(active.size()); }
  bool residual(std::span<const double> x, std::span<double> f) override {
    if (!system->evaluate(x, active)) return false;
    system->residual(x, active, f);
    return true;
  }
  bool jacobian(std::span<const double> x, std::span<double> values) override {
    if (!system->evaluate(x, active)) return false;
    scratch_.resize(x.size());
    system->residual(x, active, scratch_);
    system->jacobian(x, active, values);
    return true;
  }
  std::string equation_name(int row) const override { return system->equation_name(row, active); }

 private:
  std::vector<double> scratch_;
};

struct EquilibriumSolver::Work {
  EquilibriumSystem system;
  ConvexPhase convex;
  Finish finish;
  FixedSetProblem problem;
  std::map<int, KinsolSolver> kinsol;  // by number of unknowns
  CellMatrix jacobian;
  CellVector step;
  Eigen::PartialPivLU<CellMatrix> lu;
  std::vector<double> x, f, trial, before;
  std::vector<int> active;
  std::vector<Reservoir> held;  // of the last solve
  int newton_total = 0;

  // linearised state
  const EquilibriumState* at = nullptr;
  std::vector<double> totals;
  double temperature = 0;

  Work(std::shared_ptr<const Chemistry> chemistry, Finish how) : system(std::move(chemistry)), convex(system), finish(how) {
    check(system.head() + system.phases() < most_unknowns, "too many unknowns in one cell");
    problem.system = &system;
    x.reserve(most_unknowns);
    f.reserve(most_unknowns);
    trial.reserve(most_unknowns);
  }

  int size() const { return system.head() + static_cast<int>(active.size()); }

  bool factor() {
    const int n = size();
    jacobian.resize(n, n);
    system.jacobian(x, active, {jacobian.data(), static_cast<std::size_t>(n) * n});
    lu.compute(jacobian);
    return true;
  }

  double shortened(double cap, double residual) {
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

  // `careful`: shorter steps, taken back by half while they make the worst residual five times larger.
  SolveReport newton_own(bool careful = false) {
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

  SolveReport newton_kinsol() {
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

  // Newton with phases dropped and added one at a time until Gibbs' conditions hold.
  SolveReport settle(bool own, bool careful = false) {
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

  // Stage after stage of steeper pseudo-species, each from the last; after the third, and after each later one, the exact
  // equations are tried with the solids identified so far.
  SolveReport cold() {
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

  SolveReport from_convex(bool careful) {
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

  void keep(EquilibriumState& state) {
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
};

EquilibriumSolver::EquilibriumSolver(std::shared_ptr<const Chemistry> chemistry, Finish finish)
    : work_(std::make_unique<Work>(std::move(chemistry), finish)) {}
EquilibriumSolver::~EquilibriumSolver() = default;
EquilibriumSolver::EquilibriumSolver(EquilibriumSolver&&) noexcept = default;

const Chemistry& EquilibriumSolver::chemistry() const { return work_->system.chemistry(); }
int EquilibriumSolver::iterations_total() const { return work_->newton_total; }

SolveReport EquilibriumSolver::solve(std::span<const double> totals, double temperature, EquilibriumState& state,
                                     const std::vector<Reservoir>& held) {
  Work& w = *work_;
  w.at = nullptr;
  w.held = held;
  if (!state.solved) return solve_cold(totals, temperature, state, held);
  w.system.set_temperature(temperature);
  w.system.set_reservoirs(held);
  // A state of other held items is no start: its phases mean something else.
  if (!w.system.set_totals(totals) || static_cast<int>(state.phase_amount.size()) != w.system.phases())
    return solve_cold(totals, temperature, state, held);
  w.x = state.x;
  w.active = state.active;
  // Amounts are kept in units of sigma, which moved with the totals.
  for (std::size_t a = 0; a < w.active.size(); ++a)
    w.x[w.system.head() + a] = state.phase_amount[w.active[a]] / (w.system.sigma(w.active[a]) * w.system.scale());
  const SolveReport report = w.settle(w.finish == Finish::own);
  if (!report.ok) return solve_cold(totals, temperature, state, held);
  w.keep(state);
  return report;
}

SolveReport EquilibriumSolver::solve_cold(std::span<const double> totals, double temperature, EquilibriumState& state,
                                          const std::vector<Reservoir>& held) {
  Work& w = *work_;
  w.at = nullptr;
  w.held = held;
  w.system.set_temperature(temperature);
  w.system.set_reservoirs(held);
  state.solved = false;
  if (!w.system.set_totals(totals)) {
    SolveReport report;
    report.message = "the totals are not a liquor: no water, or an amount beyond 1000 mol per kg of water";
    return report;
  }
  SolveReport report = w.cold();
  if (report.ok) w.keep(state);
  return report;
}

bool EquilibriumSolver::linearise(std::span<const double> totals, double temperature, const EquilibriumState& state) {
  Work& w = *work_;
  check(state.solved, "linearise needs a solved state");
  w.system.set_temperature(temperature);
  w.system.set_reservoirs(w.held);
  if (!w.system.set_totals(totals) || static_cast<int>(state.phase_amount.size()) != w.system.phases()) return false;
  w.x = state.x;
  w.active = state.active;
  for (std::size_t a = 0; a < w.active.size(); ++a)
    w.x[w.system.head() + a] = state.phase_amount[w.active[a]] / (w.system.sigma(w.active[a]) * w.system.scale());
  if (!w.system.evaluate(w.x, w.active)) return false;
  w.f.assign(w.size(), 0.0);
  w.system.residual(w.x, w.active, w.f);
  w.factor();
  w.at = &state;
  w.totals.assign(totals.begin(), totals.end());
  w.temperature = temperature;
  return true;
}

double EquilibriumSolver::probe_value(const Probe& probe, std::span<const double> totals, double temperature,
                                      const EquilibriumState& state) {
  const Chemistry& c = chemistry();
  const auto volume = [&] {
    std::array<double, most_unknowns> liquid{};
    for (int j = 0; j <= c.component_count(); ++j) liquid[j] = totals[j];
    for (std::size_t s = 0; s < c.phases.size(); ++s)
      if (state.phase_amount[s] != 0) {
        for (const Share& share : c.phases[s].shares) liquid[share.component] -= share.coefficient * state.phase_amount[s];
        liquid[c.water()] -= c.phases[s].water * state.phase_amount[s];
      }
    return c.liquor_volume.volume(temperature, {liquid.data(), totals.size()}, {});
  };
  double sum = 0;
  switch (probe.kind) {
    case ProbeKind::molality: return state.molality[probe.index];
    case ProbeKind::concentration: return state.molality[probe.index] * state.solvent / volume();
    case ProbeKind::total:
      if (probe.index == c.hydrogen) {  // signed: its species cancel, what is fed less what has formed does not
        sum = totals[probe.index];
        for (std::size_t s = 0; s < c.phases.size(); ++s)
          for (const Share& share : c.phases[s].shares)
            if (share.component == probe.index) sum -= share.coefficient * state.phase_amount[s];
        return sum / volume();
      }
      // Summed over the species: what is fed less what has formed would be noise over a sparingly soluble solid.
      for (std::size_t i = 0; i < c.species.size(); ++i)
        for (const Share& share : c.species[i].shares)
          if (share.component == probe.index) sum += share.coefficient * state.molality[i];
      return sum * (state.solvent / volume());
    case ProbeKind::saturation: return std::pow(10.0, state.log10_omega[probe.index]);
    case ProbeKind::formed: return state.phase_amount[probe.index];
    case ProbeKind::liquor_volume: return volume();
    case ProbeKind::formed_volume:
      for (std::size_t s = 0; s < c.phases.size(); ++s) sum += c.phases[s].molar_volume * state.phase_amount[s];
      return sum;
    case ProbeKind::formed_mass:
      for (std::size_t s = 0; s < c.phases.size(); ++s) sum += c.phases[s].molar_mass * state.phase_amount[s];
      return sum;
  }
  return 0;
}

double EquilibriumSolver::probe(const Probe& probe, std::span<double> gradient) {
  Work& w = *work_;
  check(w.at != nullptr, "probe needs a linearised state");
  const EquilibriumSystem& system = w.system;
  const Chemistry& c = system.chemistry();
  const EquilibriumState& state = *w.at;
  const int nc = system.components(), na = system.arguments(), n = w.size(), tail = system.head();
  const double scale = system.scale();

  // Value p(x, N): its derivative with respect to x goes to dx, the direct one to `gradient`.
  CellVector dx = CellVector::Zero(n);
  std::fill(gradient.begin(), gradient.end(), 0.0);
  const auto add_molality = [&](int i, double factor) {  // factor * d m_i
    const double m = factor * state.molality[i];
    for (const Share& share : system.species_shares(i)) dx[share.component] += m * share.coefficient;
    for (int k = 0; k < na; ++k)
      dx[nc + k] += m * (system.species_water(i) * system.dln_water()[k] - system.dln_gamma()[i * na + k]);
  };
  // d(amount of phase) = sigma scale d nu + nu d(sigma scale); the amount itself is the unknown, sigma only its unit.
  const auto add_amount = [&](int s, double factor) {
    for (std::size_t a = 0; a < w.active.size(); ++a)
      if (w.active[a] == s) dx[tail + a] += factor * system.sigma(s) * scale;
    if (state.phase_amount[s] != 0) gradient[nc] += factor * state.phase_amount[s] / w.totals[nc];
  };
  std::array<double, most_unknowns> liquid{}, dvolume{};
  double volume = 0;
  const auto take_volume = [&] {
    for (int j = 0; j <= nc; ++j) liquid[j] = w.totals[j];
    for (int s = 0; s < system.solids(); ++s)
      if (state.phase_amount[s] != 0) {
        for (const Share& share : c.phases[s].shares) liquid[share.component] -= share.coefficient * state.phase_amount[s];
        liquid[nc] -= c.phases[s].water * state.phase_amount[s];
      }
    volume = c.liquor_volume.volume(w.temperature, {liquid.data(), static_cast<std::size_t>(nc + 1)},
                                    {dvolume.data(), static_cast<std::size_t>(nc + 1)});
  };
  const auto add_volume = [&](double factor) {
    for (int j = 0; j <= nc; ++j) gradient[j] += factor * dvolume[j];
    for (int s = 0; s < system.solids(); ++s)
      if (state.phase_amount[s] != 0) {
        double change = c.phases[s].water * dvolume[nc];
        for (const Share& share : c.phases[s].shares) change += share.coefficient * dvolume[share.component];
        add_amount(s, -factor * change);
      }
  };
  double value = 0;
  switch (probe.kind) {
    case ProbeKind::molality:
      value = state.molality[probe.index];
      add_molality(probe.index, 1);
      break;
    case ProbeKind::concentration: {
      take_volume();
      value = state.molality[probe.index] * state.solvent / volume;
      add_molality(probe.index, state.solvent / volume);
      dx[nc + na] += value;                       // solvent = e^w scale
      gradient[nc] += value / w.totals[nc];       // scale follows the water
      add_volume(-value / volume);
      break;
    }
    case ProbeKind::total: {
      take_volume();
      if (probe.index == c.hydrogen) {
        value = liquid[probe.index] / volume;
        gradient[probe.index] += 1 / volume;
        for (int s = 0; s < system.solids(); ++s)
          for (const Share& share : c.phases[s].shares)
            if (share.component == probe.index && state.phase_amount[s] != 0) add_amount(s, -share.coefficient / volume);
        add_volume(-value / volume);
        break;
      }
      double sum = 0;
      for (std::size_t i = 0; i < c.species.size(); ++i)
        for (const Share& share : c.species[i].shares)
          if (share.component == probe.index) {
            sum += share.coefficient * state.molality[i];
            add_molality(static_cast<int>(i), share.coefficient * state.solvent / volume);
          }
      value = sum * (state.solvent / volume);
      dx[nc + na] += value;
      gradient[nc] += value / w.totals[nc];
      add_volume(-value / volume);
      break;
    }
    case ProbeKind::saturation: {
      value = std::pow(10.0, state.log10_omega[probe.index]);
      for (const Share& share : system.phase_shares(probe.index)) dx[share.component] += value * share.coefficient;
      for (int k = 0; k < na; ++k) dx[nc + k] += value * system.phase_water(probe.index) * system.dln_water()[k];
      break;
    }
    case ProbeKind::formed:
      value = state.phase_amount[probe.index];
      add_amount(probe.index, 1);
      break;
    case ProbeKind::liquor_volume:
      take_volume();
      value = volume;
      add_volume(1);
      break;
    case ProbeKind::formed_volume:
    case ProbeKind::formed_mass:
      for (int s = 0; s < system.solids(); ++s) {
        const double unit = probe.kind == ProbeKind::formed_volume ? c.phases[s].molar_volume : c.phases[s].molar_mass;
        value += unit * state.phase_amount[s];
        if (state.phase_amount[s] != 0) add_amount(s, unit);
      }
      break;
  }
  // J dx = -dF/dT dT: adjoint g = J^-T dp/dx; dp/dT_j = -g_j dF_j/dT_j; T_j = N_j / scale, scale proportional to N_w.
  const CellVector adjoint = w.lu.transpose().solve(dx);
  for (int j = 0; j < nc; ++j) {
    if (system.held_at_floor(j)) continue;
    const double slope = -adjoint[j] * system.row_weight(j);
    gradient[j] += slope / scale;
    gradient[nc] -= slope * system.total(j) / w.totals[nc];
  }
  return value;
}

EquilibriumSolver::Closure EquilibriumSolver::closure(std::span<const double> totals, double temperature,
                                                      const EquilibriumState& state) {
  const Chemistry& c = chemistry();
  Closure worst;
  const int nc = c.component_count();
  const double ln10 = std::log(10.0);
  std::vector<double> sum(nc + 1, 0.0), size(nc + 1, 0.0);
  double charge = 0, charges = 0;
  EquilibriumSystem& system = work_->system;
  system.set_temperature(temperature);
  system.activity_at(std::span<const double>(state.x).subspan(nc, system.arguments()));
  const double solvent = state.solvent;
  sum[nc] = solvent / c.component_mass[nc];
  size[nc] = sum[nc];
  for (std::size_t i = 0; i < c.species.size(); ++i) {
    const double amount = state.molality[i] * solvent;
    for (const Share& share : c.species[i].shares) {
      sum[share.component] += share.coefficient * amount;
      size[share.component] += std::abs(share.coefficient) * amount;
    }
    sum[nc] += c.species[i].water * amount;
    charge += c.species[i].charge * amount;
    charges += std::abs(c.species[i].charge) * amount;
    // Mass action from the molalities of the free components alone.
    double ln_iap = std::log(state.molality[i]) + system.ln_gamma()[i] - c.species[i].water * system.ln_water();
    for (const Share& share : c.species[i].shares)
      ln_iap -= share.coefficient * (std::log(state.molality[share.component]) + system.ln_gamma()[share.component]);
    worst.mass_action = std::max(worst.mass_action, std::abs(ln_iap - ln10 * c.log10_k(c.species[i], temperature)));
  }
  for (std::size_t s = 0; s < c.phases.size(); ++s) {
    const double amount = state.phase_amount[s];
    if (amount == 0) continue;
    double ln_iap = c.phases[s].water * system.ln_water();
    for (const Share& share : c.phases[s].shares) {
      sum[share.component] += share.coefficient * amount;
      size[share.component] += std::abs(share.coefficient) * amount;
      ln_iap += share.coefficient * (std::log(state.molality[share.component]) + system.ln_gamma()[share.component]);
    }
    sum[nc] += c.phases[s].water * amount;
    worst.mass_action = std::max(worst.mass_action, std::abs(ln_iap - ln10 * c.log10_k(c.phases[s], temperature)));
  }
  for (int j = 0; j <= nc; ++j) {
    const double floor = 1e-14 * solvent * 2;
    worst.balance = std::max(worst.balance, std::max(0.0, std::abs(sum[j] - totals[j]) - floor) /
                                                std::max({size[j], std::abs(totals[j]), 1e-30}));
  }
  // Charge brought in by the totals themselves is not the cell's error.
  double brought = 0;
  for (int j = 0; j < nc; ++j) brought += c.component_charge[j] * totals[j];
  for (std::size_t r = c.phases.size(); r < state.phase_amount.size(); ++r) brought = charge;
  worst.charge = std::abs(charge - brought) / std::max(charges, 1e-30);
  return worst;
}

}  // namespace leat
