#include "models/chemistry/species_library.hpp"

#include <cmath>

#include "models/core/constants.hpp"

namespace leat {

double log10_k_at(const EquilibriumConstant& constant, double temperature) {
  // The nearest measured points below and above; the constant's own is one of them.
  std::pair<double, double> below{-1, 0}, above{-1, 0};
  const auto consider = [&](double t, double log10_k) {
    if (t <= temperature && t > below.first) below = {t, log10_k};
    if (t >= temperature && (above.first < 0 || t < above.first)) above = {t, log10_k};
  };
  consider(constant.temperature, constant.log10_k);
  for (const auto& [t, log10_k] : constant.also_at) consider(t, log10_k);
  if (below.first > 0 && above.first > 0) {
    if (above.first == below.first) return below.second;
    const double share = (1 / below.first - 1 / temperature) / (1 / below.first - 1 / above.first);
    return below.second + share * (above.second - below.second);
  }
  const std::pair<double, double>& nearest = below.first > 0 ? below : above;
  if (!constant.enthalpy) return nearest.second;
  return nearest.second - *constant.enthalpy / (gas_constant * std::log(10.0)) * (1 / temperature - 1 / nearest.first);
}

const ComponentEntry* SpeciesLibrary::component(const std::string& name) const {
  for (const ComponentEntry& entry : components)
    if (entry.name == name || entry.total_name == name || (!entry.element_state.empty() && entry.element_state == name))
      return &entry;
  return nullptr;
}

const SpeciesEntry* SpeciesLibrary::find_species(const std::string& name) const {
  for (const SpeciesEntry& entry : species)
    if (entry.name == name) return &entry;
  return nullptr;
}

const SolidEntry* SpeciesLibrary::find_solid(const std::string& name) const {
  for (const SolidEntry& entry : solids)
    if (entry.name == name) return &entry;
  for (const SolidEntry& entry : solids)
    if (entry.formula_text == name) return &entry;
  return nullptr;
}

double SpeciesLibrary::water_vapour_pressure(double temperature) const {
  return standard_atmosphere *
         std::exp(water_vapour[0] + water_vapour[1] * 100 / temperature + water_vapour[2] * std::log(temperature / 100));
}

double SpeciesLibrary::molar_mass(const Formula& formula) const {
  double mass = 0;
  for (const auto& [element, count] : formula.atoms) mass += count * atomic_weights.at(element);
  return mass;
}

}  // namespace leat
