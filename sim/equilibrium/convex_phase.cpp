#include "sim/equilibrium/convex_phase.hpp"

#include <algorithm>
#include <cmath>

namespace leat {
namespace {

constexpr double largest_exponent = 200;
constexpr int most_evaluations = 4000;
constexpr double reservoir_stiffness = 10;  // of the pseudo-species of a held activity, per unit of its scale

double log_ratio(double positive, double negative) {
  const double difference = positive - negative;
  return std::abs(difference) < 0.5 * negative ? std::log1p(difference / negative) : std::log(positive / negative);
}

}  // namespace

ConvexPhase::ConvexPhase(EquilibriumSystem& system) : system_(system) {
  const Chemistry& c = system.chemistry();
  const int n = system.components();
  lambda.assign(n, 0.0);
  ln_argument.assign(system.arguments(), 0.0);
  molality_.assign(c.species.size(), 0.0);
  base_.assign(c.species.size(), 0.0);
  positive_.assign(n, 0.0);
  negative_.assign(n, 0.0);
  row_.assign(n, 0.0);
  trial_.assign(n, 0.0);
  gradient_.assign(n, 0.0);
  species_of_.resize(n);
  for (int i = 0; i < static_cast<int>(c.species.size()); ++i)
    for (const Share& share : c.species[i].shares) species_of_[share.component].push_back(i);
}

void ConvexPhase::start() {
  const Chemistry& c = system_.chemistry();
  double strength = 0, sum = 0;
  for (int j = 0; j < system_.components(); ++j) {
    const double total = std::abs(system_.total(j));
    lambda[j] = j == c.hydrogen ? std::log(1e-7) : std::log(total);
    strength += 0.5 * c.component_charge[j] * c.component_charge[j] * total;
    sum += total;
  }
  w = 0;
  evaluations = 0;
  std::fill(ln_argument.begin(), ln_argument.end(), std::log(std::clamp(sum, 1e-7, 20.0)));
  ln_argument[0] = std::log(std::clamp(strength, 1e-7, 1.0));
  amount_.assign(system_.phases(), 0.0);
  system_.activity_at(ln_argument);
  steepness_ = 0;
  for (std::size_t i = 0; i < base_.size(); ++i)
    base_[i] = system_.ln_k(static_cast<int>(i)) - system_.ln_gamma()[i] + w +
               system_.species_water(static_cast<int>(i)) * system_.ln_water();
  species();
  for (int pass = 0; pass < 5; ++pass) sweep();
}

void ConvexPhase::species() {
  ++evaluations;
  for (std::size_t i = 0; i < base_.size(); ++i) {
    double exponent = base_[i];
    for (const Share& share : system_.species_shares(static_cast<int>(i))) exponent += share.coefficient * lambda[share.component];
    molality_[i] = std::exp(std::clamp(exponent, -700.0, largest_exponent));
  }
  for (int s = 0; s < system_.phases(); ++s) {
    if (steepness_ == 0) {
      amount_[s] = 0;
      continue;
    }
    const double omega = system_.ln_omega(s, lambda);
    amount_[s] = s < system_.solids() ? (system_.chemistry().phases[s].may_form
                                             ? system_.sigma(s) * std::exp(std::clamp(steepness_ * omega, -700.0, 60.0))
                                             : 0.0)
                                      : reservoir_stiffness * system_.sigma(s) * omega;
  }
}

double ConvexPhase::balance() {
  const int n = system_.components();
  for (int j = 0; j < n; ++j) {
    const double total = system_.total(j);
    positive_[j] = total < 0 ? -total : 0;
    negative_[j] = total > 0 ? total : 0;
  }
  for (std::size_t i = 0; i < base_.size(); ++i)
    for (const Share& share : system_.species_shares(static_cast<int>(i))) {
      const double term = share.coefficient * molality_[i];
      (term >= 0 ? positive_ : negative_)[share.component] += std::abs(term);
    }
  for (int s = 0; s < system_.phases(); ++s)
    if (amount_[s] != 0)
      for (const Share& share : system_.phase_shares(s)) {
        const double term = share.coefficient * amount_[s];
        (term >= 0 ? positive_ : negative_)[share.component] += std::abs(term);
      }
  double worst = 0;
  for (int j = 0; j < n; ++j) {
    row_[j] = positive_[j] > 0 && negative_[j] > 0 ? log_ratio(positive_[j], negative_[j])
                                                   : (positive_[j] - negative_[j] > 0 ? 50 : -50);
    gradient_[j] = positive_[j] - negative_[j];
    worst = std::max(worst, std::abs(row_[j]));
  }
  return worst;
}

void ConvexPhase::sweep() {
  for (int j = 0; j < system_.components(); ++j)
    for (int turn = 0; turn < 2; ++turn) {
      const double total = system_.total(j);
      double p = total < 0 ? -total : 0, q = total > 0 ? total : 0, dp = 0, dq = 0;
      const auto gather = [&](double coefficient, double amount) {
        const double term = coefficient * amount;
        if (term >= 0) {
          p += term;
          dp += coefficient * term;
        } else {
          q -= term;
          dq -= coefficient * term;
        }
      };
      for (int i : species_of_[j])
        for (const Share& share : system_.species_shares(i))
          if (share.component == j) gather(share.coefficient, molality_[i]);
      if (p <= 0 || q <= 0) break;
      const double f = log_ratio(p, q);
      if (std::abs(f) < 0.1) break;
      const double slope = dp / p - dq / q;
      double step = -f / std::max(slope, f > 0 ? 0.3 : 1.0);
      step = std::clamp(step, -100.0, 100.0);
      lambda[j] += step;
      for (int i : species_of_[j]) {
        double exponent = base_[i];
        for (const Share& share : system_.species_shares(i)) exponent += share.coefficient * lambda[share.component];
        molality_[i] = std::exp(std::clamp(exponent, -700.0, largest_exponent));
      }
    }
  ++evaluations;
}

void ConvexPhase::assemble(bool log_form) {
  const int n = system_.components();
  matrix_.setZero(n, n);
  const auto add = [&](std::span<const Share> shares, double weight) {
    for (const Share& row : shares) {
      double factor = row.coefficient * weight;
      if (log_form) factor /= row.coefficient >= 0 ? positive_[row.component] : negative_[row.component];
      for (const Share& column : shares) matrix_(row.component, column.component) += factor * column.coefficient;
    }
  };
  for (std::size_t i = 0; i < base_.size(); ++i) add(system_.species_shares(static_cast<int>(i)), molality_[i]);
  if (steepness_ == 0) return;
  for (int s = 0; s < system_.phases(); ++s) {
    if (s < system_.solids()) {
      if (amount_[s] > 0) add(system_.phase_shares(s), steepness_ * amount_[s]);
    } else {
      // d(amount)/d(SI) is constant; its row sign follows the amount.
      const double slope = reservoir_stiffness * system_.sigma(s);
      for (const Share& row : system_.phase_shares(s)) {
        double factor = row.coefficient * slope;
        if (log_form)
          factor /= row.coefficient * amount_[s] >= 0 ? positive_[row.component] : negative_[row.component];
        for (const Share& column : system_.phase_shares(s)) matrix_(row.component, column.component) += factor * column.coefficient;
      }
    }
  }
}

bool ConvexPhase::converge(double steepness, double tolerance) {
  steepness_ = steepness;
  const int n = system_.components();
  for (std::size_t i = 0; i < base_.size(); ++i)
    base_[i] = system_.ln_k(static_cast<int>(i)) - system_.ln_gamma()[i] + w +
               system_.species_water(static_cast<int>(i)) * system_.ln_water();
  species();
  double worst = balance();
  int rejected = 0;
  for (int iteration = 0; iteration < 400 && evaluations < most_evaluations; ++iteration) {
    if (worst < tolerance) return true;
    std::copy(lambda.begin(), lambda.end(), trial_.begin());
    bool moved = false;
    if (rejected < 6) {
      assemble(true);
      rhs_.resize(n);
      for (int j = 0; j < n; ++j) rhs_[j] = -row_[j];
      CellVector step = matrix_.partialPivLu().solve(rhs_);
      const double size = step.cwiseAbs().maxCoeff();
      if (std::isfinite(size)) {
        const double cap = size > 10 ? 10 / size : 1;
        for (int j = 0; j < n; ++j) lambda[j] = trial_[j] + cap * step[j];
        const double old = worst;
        species();
        worst = balance();
        moved = worst <= 0.8 * old || (cap * size < 1e-3 && worst <= old);
        if (!moved) worst = old;
      }
    }
    if (moved) continue;
    ++rejected;
    std::copy(trial_.begin(), trial_.end(), lambda.begin());
    species();
    worst = balance();
    if (rejected <= 4 && steepness == 1 && worst > 5) {
      sweep();
      sweep();
      species();
      worst = balance();
      continue;
    }
    // Newton on Phi: Hessian A' diag(m) A, scaled by its diagonal; cap 4; backtrack on the directional derivative.
    assemble(false);
    CellVector scale(n);
    for (int j = 0; j < n; ++j) scale[j] = 1 / std::sqrt(std::max(matrix_(j, j), 1e-300));
    for (int j = 0; j < n; ++j)
      for (int k = 0; k < n; ++k) matrix_(j, k) *= scale[j] * scale[k];
    for (int j = 0; j < n; ++j) matrix_(j, j) += 1e-14;
    rhs_.resize(n);
    for (int j = 0; j < n; ++j) rhs_[j] = -gradient_[j] * scale[j];
    CellVector step = matrix_.ldlt().solve(rhs_);
    for (int j = 0; j < n; ++j) step[j] *= scale[j];
    double size = step.cwiseAbs().maxCoeff();
    if (!std::isfinite(size)) return false;
    double along = 0;
    for (int j = 0; j < n; ++j) along += gradient_[j] * step[j];
    double length = size > 4 ? 4 / size : 1;
    for (int halving = 0; halving < 40; ++halving) {
      for (int j = 0; j < n; ++j) lambda[j] = trial_[j] + length * step[j];
      species();
      worst = balance();
      double now = 0;
      for (int j = 0; j < n; ++j) now += gradient_[j] * step[j];
      if (now <= 0.9 * std::abs(along)) break;
      length *= 0.5;
    }
  }
  return worst < tolerance;
}

void ConvexPhase::update_activity() {
  const double solvent = std::exp(w);
  for (int k = 0; k < system_.arguments(); ++k) {
    double sum = 0;
    for (std::size_t i = 0; i < base_.size(); ++i)
      sum += system_.argument_coefficient(k, static_cast<int>(i)) * molality_[i] / solvent;
    ln_argument[k] = std::log(std::clamp(sum, 1e-8, 200.0));
  }
  double bound = 0;
  for (std::size_t i = 0; i < base_.size(); ++i) bound += system_.species_water(static_cast<int>(i)) * molality_[i];
  const auto& phases = system_.chemistry().phases;
  for (int s = 0; s < system_.solids(); ++s) bound += phases[s].water * amount_[s];
  const double water = system_.water_per_kilogram();
  w = std::log(std::clamp((water - bound) / water, 0.05, 20.0));
  system_.activity_at(ln_argument);
}

}  // namespace leat
