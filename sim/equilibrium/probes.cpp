#include <algorithm>
#include <array>
#include <cmath>

#include "models/core/check.hpp"
#include "sim/equilibrium/solver_work.hpp"

namespace leat {

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
  const auto floored = [&](int species, double& share) {
    work_->system.set_totals(totals);
    work_->floored_component(species, totals, share);
  };
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
  double sum = 0, present = 1;
  switch (probe.kind) {
    case ProbeKind::molality:
      floored(probe.index, present);
      return state.molality[probe.index] * present;
    case ProbeKind::concentration:
      floored(probe.index, present);
      return state.molality[probe.index] * state.solvent / volume() * present;
    case ProbeKind::total:
      if (probe.index == c.hydrogen) {  // signed: its species cancel, what is fed less what has formed does not
        sum = totals[probe.index];
        for (std::size_t s = 0; s < c.phases.size(); ++s)
          for (const Share& share : c.phases[s].shares)
            if (share.component == probe.index) sum -= share.coefficient * state.phase_amount[s];
        return sum / volume();
      }
      work_->system.set_totals(totals);
      if (work_->system.held_at_floor(probe.index)) return std::max(0.0, totals[probe.index]) / volume();
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
    case ProbeKind::molality: {
      double share = 1;
      const int floored = w.floored_component(probe.index, w.totals, share);
      if (floored >= 0) {
        value = state.molality[probe.index] * share;
        gradient[floored] += state.molality[probe.index] / (system.total(floored) * scale);
        return value;
      }
      value = state.molality[probe.index];
      add_molality(probe.index, 1);
      break;
    }
    case ProbeKind::concentration: {
      take_volume();
      double share = 1;
      const int floored = w.floored_component(probe.index, w.totals, share);
      if (floored >= 0) {
        value = state.molality[probe.index] * state.solvent / volume * share;
        gradient[floored] += state.molality[probe.index] * state.solvent / volume / (system.total(floored) * scale);
        return value;
      }
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
      if (system.held_at_floor(probe.index)) {
        value = std::max(0.0, w.totals[probe.index]) / volume;
        gradient[probe.index] += 1 / volume;
        return value;
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
    // What is held at the floor, and the little below zero that an integrator may leave of a component used up.
    const double floor = 1e-14 * solvent * 2 + (j != c.hydrogen ? std::clamp(-totals[j], 0.0, 1e-9 * solvent) : 0.0);
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
