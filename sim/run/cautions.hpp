#pragma once
#include <span>

#include "models/chemistry/species_library.hpp"
#include "sim/run/run_result.hpp"

namespace leat {

// Looks at every solved vessel and stream for what can hurt someone and for what weakens the numbers, and adds a caution
// beside the number that fired it. Headspace tenors are those at equilibrium with still air: an upper bound.
void find_cautions(const SpeciesLibrary& library, RunResult& result);

// The same for one liquor: name and temperature [K] of the place, its cell.
struct LiquorToWatch {
  std::string place;
  double temperature = 298.15;   // [K]
  double ph = 7;
  double ionic_strength = 0;     // [mol/kg]
  double water_per_volume = 1000;  // solvent in the liquor [kg/m3]
  const std::vector<double>* molality = nullptr;
  const std::vector<double>* dissolved = nullptr;  // per component [mol/m3]
  bool acid_added = false;
  std::string when = {};         // " at 4 h", or empty
};
void watch_liquor(const SpeciesLibrary& library, const Chemistry& chemistry, double pressure, const LiquorToWatch& liquor,
                  std::vector<Caution>& cautions);

// Cautions about constants in use: from memory, beyond zero ionic strength, the user's own, without an enthalpy away from
// where they were measured. temperatures: met in the case [K].
void watch_constants(const Chemistry& chemistry, std::span<const double> temperatures, std::vector<Caution>& cautions);

// Solids that may not form here although the liquor is supersaturated with them.
void watch_solids(const Chemistry& chemistry, const std::string& place, std::span<const double> log10_omega, std::vector<Caution>& cautions);

// The worst caution of each kind, with the number of places, and the closing sentence last: a line each.
std::vector<std::string> cautions_in_short(std::span<const Caution> cautions);

// The sentence every list of safety cautions ends with.
std::string closing_caution();

}  // namespace leat
