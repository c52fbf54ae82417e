#include "models/chemistry/equilibrium_system.hpp"

#include <algorithm>
#include <cmath>

namespace leat {
namespace {

constexpr double smallest_total = 1e-14;    // [mol/kg]
constexpr double largest_total = 1000;      // [mol/kg]
constexpr double largest_exponent = 300;    // of e; beyond it a trial point is refused
constexpr double phase_share_for_plain = 0.1;

// ln(P/N) without cancellation where they are close.
double log_ratio(double positive, double negative) {
  const double difference = positive - negative;
  return std::abs(difference) < 0.5 * negative ? std::log1p(difference / negative) : std::log(positive / negative);
}

}  // namespace

EquilibriumSystem::EquilibriumSystem(std::shared_ptr<const Chemistry> chemistry) : chemistry_(std::move(chemistry)) {
  const Chemistry& c = *chemistry_;
  components_ = c.component_count();
  species_count_ = static_cast<int>(c.species.size());
  solids_ = static_cast<int>(c.phases.size());
  for (const MassActionRow& row : c.species) {
    share_begin_.push_back(static_cast<int>(shares_.size()));
    shares_.insert(shares_.end(), row.shares.begin(), row.shares.end());
    species_water_.push_back(row.water);
  }
  share_begin_.push_back(static_cast<int>(shares_.size()));
  argument_rows_ = c.activity->arguments(c.activity_species);
  arguments_ = static_cast<int>(argument_rows_.size());
  for (const PhaseRow& row : c.phases) {
    phase_shares_.push_back(row.shares);
    phase_water_.push_back(row.water);
  }
  phase_ln_k_.assign(solids_, 0.0);
  sigma_.assign(solids_, 1.0);
  ln_k_.assign(species_count_, 0.0);
  molality_.assign(species_count_, 0.0);
  ln_gamma_.assign(species_count_, 0.0);
  dln_gamma_.assign(species_count_ * arguments_, 0.0);
  dln_water_.assign(arguments_, 0.0);
  argument_values_.assign(arguments_, 1.0);
  argument_sum_.assign(arguments_, 0.0);
  totals_.assign(components_, 0.0);
  positive_.assign(components_, 0.0);
  negative_.assign(components_, 0.0);
  row_weight_.assign(components_, 0.0);
  row_scale_.assign(components_, 0.0);
  floored_.assign(components_, false);
  plain_.assign(components_, false);
  water_per_kilogram_ = 1 / c.component_mass[c.water()];
  conditions_.water_molar_mass = c.component_mass[c.water()];
}

std::span<const Share> EquilibriumSystem::species_shares(int species) const {
  return {shares_.data() + share_begin_[species], static_cast<std::size_t>(share_begin_[species + 1] - share_begin_[species])};
}

void EquilibriumSystem::set_temperature(double temperature) {
  if (temperature == temperature_) return;
  temperature_ = temperature;
  const double ln10 = std::log(10.0);
  for (int i = 0; i < species_count_; ++i) ln_k_[i] = ln10 * chemistry_->log10_k(chemistry_->species[i], temperature);
  for (int s = 0; s < solids_; ++s) phase_ln_k_[s] = ln10 * chemistry_->log10_k(chemistry_->phases[s], temperature);
  conditions_.temperature = temperature;
  conditions_.debye_huckel_a = chemistry_->debye_huckel_a(temperature);
}

void EquilibriumSystem::set_reservoirs(const std::vector<Reservoir>& held) {
  phase_shares_.resize(solids_);
  phase_water_.resize(solids_);
  phase_ln_k_.resize(solids_);
  sigma_.resize(solids_);
  for (const Reservoir& one : held) {
    phase_shares_.push_back(one.shares);
    phase_water_.push_back(one.water);
    phase_ln_k_.push_back(one.ln_activity);
    sigma_.push_back(1.0);
  }
}

bool EquilibriumSystem::set_totals(std::span<const double> totals) {
  const double water = totals[components_];
  if (!(water > 0) || !std::isfinite(water)) return false;
  scale_ = water / water_per_kilogram_;
  double largest = 1e-3;
  for (int j = 0; j < components_; ++j) {
    double value = totals[j] / scale_;
    if (!std::isfinite(value) || std::abs(value) > largest_total) return false;
    floored_[j] = j != chemistry_->hydrogen && value < smallest_total;
    totals_[j] = floored_[j] ? smallest_total : value;
    largest = std::max(largest, std::abs(totals_[j]));
  }
  for (int s = 0; s < phases(); ++s) {
    if (s >= solids_) {
      sigma_[s] = largest;
      continue;
    }
    double most = largest_total;
    for (const Share& share : phase_shares_[s])
      if (share.component != chemistry_->hydrogen && share.coefficient > 0)
        most = std::min(most, totals_[share.component] / share.coefficient);
    sigma_[s] = most;
  }
  return true;
}

void EquilibriumSystem::activity_at(std::span<const double> ln_arguments) {
  for (int k = 0; k < arguments_; ++k) argument_values_[k] = std::exp(ln_arguments[k]);
  ActivityValues values{ln_gamma_, dln_gamma_, 0, dln_water_};
  chemistry_->activity->evaluate(chemistry_->activity_species, conditions_, argument_values_, values);
  ln_water_ = values.ln_water;
}

bool EquilibriumSystem::evaluate(std::span<const double> x, std::span<const int>) {
  activity_at(x.subspan(components_, arguments_));
  solvent_ = std::exp(x[components_ + arguments_]);
  for (int i = 0; i < species_count_; ++i) {
    double exponent = ln_k_[i] - ln_gamma_[i] + species_water_[i] * ln_water_;
    for (int k = share_begin_[i]; k < share_begin_[i + 1]; ++k) exponent += shares_[k].coefficient * x[shares_[k].component];
    if (!(exponent < largest_exponent)) return false;
    molality_[i] = std::exp(exponent);
  }
  return std::isfinite(solvent_);
}

void EquilibriumSystem::residual(std::span<const double> x, std::span<const int> active, std::span<double> f) {
  std::fill(positive_.begin(), positive_.end(), 0.0);
  std::fill(negative_.begin(), negative_.end(), 0.0);
  double water = 0;
  for (int i = 0; i < species_count_; ++i) {
    const double amount = solvent_ * molality_[i];
    for (int k = share_begin_[i]; k < share_begin_[i + 1]; ++k) {
      const double term = shares_[k].coefficient * amount;
      (term >= 0 ? positive_ : negative_)[shares_[k].component] += std::abs(term);
    }
    water += species_water_[i] * amount;
  }
  const int tail = head();
  for (int j = 0; j < components_; ++j) {
    (totals_[j] >= 0 ? negative_ : positive_)[j] += std::abs(totals_[j]);
    plain_[j] = false;
    row_scale_[j] = 0;
  }
  for (std::size_t a = 0; a < active.size(); ++a) {
    const int s = active[a];
    const double amount = sigma_[s] * x[tail + a];
    for (const Share& share : phase_shares_[s]) {
      const double term = share.coefficient * amount;
      (term >= 0 ? positive_ : negative_)[share.component] += std::abs(term);
      row_scale_[share.component] += std::abs(term);
    }
    water += phase_water_[s] * amount;
  }
  for (int j = 0; j < components_; ++j) {
    const double p = positive_[j], n = negative_[j];
    plain_[j] = row_scale_[j] > phase_share_for_plain * std::min(p, n) || p <= 0 || n <= 0;
    if (plain_[j]) {
      f[j] = 2 * (p - n) / (p + n);
      row_weight_[j] = -2 / (p + n);
    } else {
      f[j] = log_ratio(p, n);
      row_weight_[j] = totals_[j] >= 0 ? -1 / n : -1 / p;
    }
  }
  for (int k = 0; k < arguments_; ++k) {
    double sum = 0;
    for (int i = 0; i < species_count_; ++i) sum += argument_rows_[k].coefficient[i] * molality_[i];
    argument_sum_[k] = sum;
    f[components_ + k] = std::log(sum) - x[components_ + k];
  }
  f[components_ + arguments_] = (solvent_ * water_per_kilogram_ + water - water_per_kilogram_) / water_per_kilogram_;
  for (std::size_t a = 0; a < active.size(); ++a) f[tail + a] = ln_omega(active[a], x);
}

double EquilibriumSystem::ln_omega(int phase, std::span<const double> x) const {
  double sum = phase_water_[phase] * ln_water_ - phase_ln_k_[phase];
  for (const Share& share : phase_shares_[phase]) sum += share.coefficient * x[share.component];
  return sum;
}

void EquilibriumSystem::jacobian(std::span<const double> x, std::span<const int> active, std::span<double> matrix) {
  const int tail = head(), n = tail + static_cast<int>(active.size());
  const int wcol = components_ + arguments_;
  std::fill(matrix.begin(), matrix.begin() + static_cast<std::ptrdiff_t>(n) * n, 0.0);
  const auto at = [&](int row, int column) -> double& { return matrix[static_cast<std::size_t>(column) * n + row]; };
  const auto weight = [&](int j, double coefficient, double total_sign) {
    // d f_j / d(term): 1/P for a growing positive term, 1/N for a shrinking negative one
    if (plain_[j]) return 2 / (positive_[j] + negative_[j]);
    return coefficient * total_sign >= 0 ? 1 / positive_[j] : 1 / negative_[j];
  };
  for (int i = 0; i < species_count_; ++i) {
    const double m = molality_[i], amount = solvent_ * m;
    const Share* begin = shares_.data() + share_begin_[i];
    const Share* end = shares_.data() + share_begin_[i + 1];
    for (const Share* row = begin; row != end; ++row) {
      const int j = row->component;
      const double term = row->coefficient * amount * weight(j, row->coefficient, 1);
      for (const Share* column = begin; column != end; ++column) at(j, column->component) += term * column->coefficient;
      for (int k = 0; k < arguments_; ++k)
        at(j, components_ + k) += term * (species_water_[i] * dln_water_[k] - dln_gamma_[i * arguments_ + k]);
      at(j, wcol) += term;
    }
    for (int k = 0; k < arguments_; ++k) {
      const double part = argument_rows_[k].coefficient[i] * m / argument_sum_[k];
      if (part == 0) continue;
      const int row = components_ + k;
      for (const Share* column = begin; column != end; ++column) at(row, column->component) += part * column->coefficient;
      for (int l = 0; l < arguments_; ++l)
        at(row, components_ + l) += part * (species_water_[i] * dln_water_[l] - dln_gamma_[i * arguments_ + l]);
    }
    if (species_water_[i] != 0) {
      const double part = species_water_[i] * amount / water_per_kilogram_;
      for (const Share* column = begin; column != end; ++column) at(wcol, column->component) += part * column->coefficient;
      for (int k = 0; k < arguments_; ++k)
        at(wcol, components_ + k) += part * (species_water_[i] * dln_water_[k] - dln_gamma_[i * arguments_ + k]);
      at(wcol, wcol) += part;
    }
  }
  for (int k = 0; k < arguments_; ++k) at(components_ + k, components_ + k) -= 1;
  at(wcol, wcol) += solvent_;
  for (std::size_t a = 0; a < active.size(); ++a) {
    const int s = active[a], index = tail + static_cast<int>(a);
    for (const Share& share : phase_shares_[s]) {
      at(share.component, index) +=
          share.coefficient * sigma_[s] * weight(share.component, share.coefficient, x[index] >= 0 ? 1 : -1);
      at(index, share.component) += share.coefficient;
    }
    at(wcol, index) += phase_water_[s] * sigma_[s] / water_per_kilogram_;
    for (int k = 0; k < arguments_; ++k) at(index, components_ + k) += phase_water_[s] * dln_water_[k];
  }
}

std::string EquilibriumSystem::equation_name(int row, std::span<const int> active) const {
  if (row < 0) return "none";
  if (row < components_) return "balance of " + chemistry_->total_names[row];
  if (row < components_ + arguments_) return argument_rows_[row - components_].name;
  if (row == components_ + arguments_) return "balance of water";
  const int phase = active[row - head()];
  return phase < solids_ ? "saturation of " + chemistry_->phases[phase].name : "held value";
}

}  // namespace leat
