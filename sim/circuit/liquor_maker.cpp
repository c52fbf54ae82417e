#include "sim/circuit/liquor_maker.hpp"

#include <fmt/format.h>

#include <cmath>

#include "models/core/nearest.hpp"

namespace leat {
namespace {

constexpr double charge_allowance = 1e-6;  // of the charges present [1]

std::vector<std::string> known_names(const SpeciesLibrary& library) {
  std::vector<std::string> names;
  for (const ComponentEntry& entry : library.components) {
    names.push_back(entry.name);
    names.push_back(entry.total_name);
  }
  for (const SpeciesEntry& entry : library.species) names.push_back(entry.name);
  for (const SolidEntry& entry : library.solids) names.push_back(entry.name);
  return names;
}

}  // namespace

const LiquorSpec& LiquorMaker::follow(const LiquorSpec& liquor) const {
  const LiquorSpec* at = &liquor;
  for (int depth = 0; depth < 16 && !at->named.empty(); ++depth) {
    const auto found = named_.find(at->named);
    if (found == named_.end()) break;
    at = &found->second;
  }
  return *at;
}

bool LiquorMaker::resolve(const std::string& name, const Place& place, ComponentAmounts& amounts, double& molar_mass) {
  std::string fault;
  ComponentAmounts tried;
  if (components_of(library_, name, tried, molar_mass, fault)) {
    amounts = tried;
    return true;
  }
  // An ion written without its charge: HCO3, NH4.
  for (const SpeciesEntry& entry : library_.species)
    if (entry.name.substr(0, entry.name.find('^')) == name && entry.name != name) {
      amounts = {};
      return components_of(library_, entry.name, amounts, molar_mass, fault);
    }
  if (const SolidEntry* solid = library_.find_solid(name); solid && !solid->constant) {
    diagnostics_.fault(Code::no_law, place, "'" + name + "' is a solid without a solubility constant: no liquor can be made with it");
    return false;
  }
  diagnostics_.fault(Code::unknown_name, place, "'" + name + "' is not known: " + fault + did_you_mean(name, known_names(library_)));
  return false;
}

void LiquorMaker::collect(const std::string& compound, const Place& place, std::set<std::string>& components) {
  ComponentAmounts amounts;
  double mass = 0;
  if (!resolve(compound, place, amounts, mass)) return;
  for (const auto& [name, count] : amounts.amounts) components.insert(name);
}

void LiquorMaker::collect(const LiquorSpec& given, std::set<std::string>& components) {
  const LiquorSpec& liquor = follow(given);
  for (const NamedAmount& one : liquor.contents) collect(one.name, one.amount.place, components);
  if (!liquor.balance_with.empty()) collect(liquor.balance_with, liquor.place, components);
}

std::optional<std::vector<double>> LiquorMaker::row(const std::string& name, const Place& place, const Chemistry& chemistry,
                                                    double& molar_mass) {
  ComponentAmounts amounts;
  if (!resolve(name, place, amounts, molar_mass)) return std::nullopt;
  std::vector<double> out(chemistry.component_count() + 1, 0.0);
  for (const auto& [component, count] : amounts.amounts) {
    const int j = chemistry.find_component(component);
    if (j < 0) {
      diagnostics_.fault(Code::unknown_name, place, "'" + name + "' needs " + component + ", which is not in play here");
      return std::nullopt;
    }
    out[j] += count;
  }
  return out;
}

// mol of `name` in the typed amount, where `kind` is the dimension expected without the amount: "mol/m3" also reads kg/m3.
std::optional<double> LiquorMaker::moles_per(const std::string& name, const TypedAmount& amount, const ComponentAmounts& of,
                                             double molar_mass, std::string_view kind) {
  const std::string mole_unit(kind), mass_unit = "kg" + mole_unit.substr(3);
  double ratio = 1, mass = molar_mass;
  if (!amount.as.empty()) {
    ComponentAmounts as;
    if (!resolve(amount.as, amount.place, as, mass)) return std::nullopt;
    ratio = 0;
    for (const auto& [component, count] : of.amounts)
      if (component != "H2O" && component != "H^+" && as.amounts.count(component)) ratio = as.amounts[component] / count;
    if (ratio <= 0) {
      diagnostics_.fault(Code::bad_quantity, amount.place, name + " cannot be counted as " + amount.as + ": it has none of it");
      return std::nullopt;
    }
  }
  if (convertible(amount.quantity.unit, mole_unit)) return ratio * convert(amount.quantity, mole_unit);
  if (convertible(amount.quantity.unit, mass_unit)) return ratio * convert(amount.quantity, mass_unit) / mass;
  return std::nullopt;
}

std::optional<double> LiquorMaker::concentration(const std::string& name, const TypedAmount& amount) {
  ComponentAmounts of;
  double mass = 0;
  if (!resolve(name, amount.place, of, mass)) return std::nullopt;
  const auto value = moles_per(name, amount, of, mass, "mol/m3");
  if (!value)
    diagnostics_.fault(Code::wrong_unit, amount.place,
                       fmt::format("{} {} is not a concentration; write for example 0.1 mol/L or 400 mg/L", amount.quantity.number,
                                   amount.quantity.unit));
  return value;
}

std::optional<std::vector<double>> LiquorMaker::per_volume(const LiquorSpec& given, const Chemistry& chemistry, double temperature) {
  const LiquorSpec& liquor = follow(given);
  const double t = liquor.temperature.value_or(temperature);
  const int water = chemistry.water();
  // Solutes per m3, per kg of water, and as shares of the mass of the liquor.
  std::vector<double> per_m3(water + 1, 0.0), per_kg(water + 1, 0.0), per_mass(water + 1, 0.0);
  double mass_share = 0;
  bool ok = true;
  for (const NamedAmount& one : liquor.contents) {
    ComponentAmounts of;
    double mass = 0;
    const auto shares = row(one.name, one.amount.place, chemistry, mass);
    if (!shares || !resolve(one.name, one.amount.place, of, mass)) {
      ok = false;
      continue;
    }
    if (one.amount.quantity.number < 0) {
      diagnostics_.fault(Code::out_of_range, one.amount.place, fmt::format("{} {} is negative", one.amount.quantity.number, one.amount.quantity.unit));
      ok = false;
      continue;
    }
    std::vector<double>* to = &per_m3;
    auto moles = moles_per(one.name, one.amount, of, mass, "mol/m3");
    if (!moles && convertible(one.amount.quantity.unit, "mol/kg")) {
      moles = convert(one.amount.quantity, "mol/kg");
      to = &per_kg;
    }
    if (!moles && convertible(one.amount.quantity.unit, "1")) {
      const double share = convert(one.amount.quantity, "1");
      mass_share += share;
      moles = share / mass;
      to = &per_mass;
    }
    if (!moles) {
      diagnostics_.fault(Code::wrong_unit, one.amount.place,
                         fmt::format("{} {} is not a concentration; write for example 0.5 mol/L, 600 mg/L, 0.5 mol/kg or 2 %",
                                     one.amount.quantity.number, one.amount.quantity.unit));
      ok = false;
      continue;
    }
    for (int j = 0; j <= water; ++j) (*to)[j] += *moles * (*shares)[j];
  }
  if (mass_share >= 1) {
    diagnostics_.fault(Code::does_not_close, liquor.place, fmt::format("the mass shares make {:.4g} %: no water is left", 100 * mass_share));
    ok = false;
  }
  if (!ok) return std::nullopt;
  // Water such that the volume is 1 m3: V grows with the water, Newton from a litre per kg.
  const auto amounts_at = [&](double kg) {
    std::vector<double> n(water + 1, 0.0);
    double mass = kg;
    for (int j = 0; j <= water; ++j) {
      n[j] = per_m3[j] + kg * per_kg[j];
      mass += n[j] * chemistry.component_mass[j];
    }
    for (int j = 0; j <= water; ++j) n[j] += mass / (1 - mass_share) * per_mass[j];
    n[water] += kg / chemistry.component_mass[water];
    return n;
  };
  double kg = 950;
  std::vector<double> n;
  for (int turn = 0; turn < 60; ++turn) {
    n = amounts_at(kg);
    const double miss = chemistry.liquor_volume.volume(t, n, {}) - 1;
    const double step = 1e-3 * kg;
    const double slope = (chemistry.liquor_volume.volume(t, amounts_at(kg + step), {}) - 1 - miss) / step;
    const double next = kg - miss / slope;
    if (!(next > 0)) {
      diagnostics_.fault(Code::out_of_range, liquor.place, "there is no room for water beside these solutes");
      return std::nullopt;
    }
    const bool done = std::abs(next - kg) < 1e-13 * kg;
    kg = next;
    if (done) break;
  }
  n = amounts_at(kg);
  if (liquor.ph && liquor.balance_with.empty()) {
    diagnostics_.fault(Code::does_not_balance, liquor.place,
                       "pH is typed together with a complete composition, which fixes it already: drop the pH, or name balance_with the ion that may move");
    return std::nullopt;
  }
  if (liquor.ph ? !reach_ph(liquor, chemistry, t, n) : !close_charge(liquor, chemistry, n)) return std::nullopt;
  return n;
}

bool LiquorMaker::close_charge(const LiquorSpec& liquor, const Chemistry& chemistry, std::vector<double>& n) {
  double charge = 0, size = 1e-9;
  for (int j = 0; j < chemistry.water(); ++j) {
    charge += chemistry.component_charge[j] * n[j];
    size += std::abs(chemistry.component_charge[j] * n[j]);
  }
  if (liquor.balance_with.empty()) {
    if (std::abs(charge) <= charge_allowance * size) {
      n[chemistry.hydrogen] -= charge;
      return true;
    }
    diagnostics_.fault(Code::does_not_balance, liquor.place,
                       fmt::format("the ions do not balance: charge {:+.4g} mol/m3 of {:.4g}; write neutral recipes (NaCl, H2SO4) or name "
                                   "balance_with the ion that closes it",
                                   charge, size));
    return false;
  }
  double mass = 0;
  const auto ion = row(liquor.balance_with, liquor.place, chemistry, mass);
  if (!ion) return false;
  double z = 0;
  for (int j = 0; j < chemistry.water(); ++j) z += chemistry.component_charge[j] * (*ion)[j];
  if (z == 0) {
    diagnostics_.fault(Code::does_not_balance, liquor.place, "balance_with names " + liquor.balance_with + ", which has no charge");
    return false;
  }
  for (int j = 0; j <= chemistry.water(); ++j) n[j] -= charge / z * (*ion)[j];
  for (int j = 0; j < chemistry.water(); ++j)
    if (j != chemistry.hydrogen && n[j] < -1e-12) {
      diagnostics_.fault(Code::does_not_balance, liquor.place,
                         fmt::format("{} would have to be taken out ({:.4g} mol/m3) to balance the ions; name an ion of the other sign",
                                     liquor.balance_with, -n[j]));
      return false;
    }
  return true;
}

// The ion named balance_with moves until the liquor, electrically neutral, has the typed pH.
bool LiquorMaker::reach_ph(const LiquorSpec& liquor, const Chemistry& chemistry, double temperature, std::vector<double>& n) {
  // An analysis is of what is dissolved: its pH is met before any solid may form.
  auto dissolved = std::make_shared<Chemistry>(chemistry);
  for (PhaseRow& phase : dissolved->phases) phase.may_form = false;
  EquilibriumSolver solver(dissolved);
  const std::vector<Reservoir> held = {{"pH", {{chemistry.hydrogen, 1.0}}, 0, -*liquor.ph * std::log(10.0)}};
  for (int turn = 0; turn < 50; ++turn) {
    EquilibriumState state;
    if (!solver.solve_cold(n, temperature, state, held).ok) break;
    const double protons = -state.phase_amount.back();  // taken up from the held reservoir
    n[chemistry.hydrogen] += protons;
    const std::vector<double> before = n;
    if (!close_charge(liquor, chemistry, n)) return false;
    double moved = 0, size = 0;
    for (std::size_t j = 0; j < n.size(); ++j) {
      if (static_cast<int>(j) != chemistry.water()) moved += std::abs(n[j] - before[j]), size += std::abs(n[j]);
    }
    if (moved < 1e-12 * size) return true;
  }
  diagnostics_.fault(Code::does_not_balance, liquor.place, "no amount of " + liquor.balance_with + " gives the typed pH");
  return false;
}

}  // namespace leat
