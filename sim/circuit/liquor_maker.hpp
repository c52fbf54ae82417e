#pragma once
#include <map>
#include <optional>
#include <set>
#include <string>
#include <vector>

#include "models/chemistry/chemistry.hpp"
#include "models/core/diagnostics.hpp"
#include "sim/circuit/flowsheet.hpp"
#include "sim/equilibrium/equilibrium_solver.hpp"

namespace leat {

// Turns typed compositions into amounts of components. Here, and only here, a typed amount per litre becomes mol:
// with the density of the whole liquor, at the temperature its volume is meant at.
class LiquorMaker {
 public:
  LiquorMaker(const SpeciesLibrary& library, const std::map<std::string, LiquorSpec>& named, Diagnostics& diagnostics)
      : library_(library), named_(named), diagnostics_(diagnostics) {}

  // Components of everything in the liquor; unknown names become faults.
  void collect(const LiquorSpec& liquor, std::set<std::string>& components);
  void collect(const std::string& compound, const Place& place, std::set<std::string>& components);

  // Amounts per cubic metre of liquor, water last [mol/m3]; nothing after a fault.
  std::optional<std::vector<double>> per_volume(const LiquorSpec& liquor, const Chemistry& chemistry, double temperature);

  // Compound, ion (HCO3) or total (Cl) as components, with its molar mass [kg/mol]; false and a fault if unknown.
  bool resolve(const std::string& name, const Place& place, ComponentAmounts& amounts, double& molar_mass);
  // A concentration as typed, of `name` [mol/m3].
  std::optional<double> concentration(const std::string& name, const TypedAmount& amount);
  // One compound as a vector over the chemistry's components, per mol; water last.
  std::optional<std::vector<double>> row(const std::string& name, const Place& place, const Chemistry& chemistry, double& molar_mass);

 private:
  std::optional<double> moles_per(const std::string& name, const TypedAmount& amount, const ComponentAmounts& of,
                                  double molar_mass, std::string_view kind);
  bool close_charge(const LiquorSpec& liquor, const Chemistry& chemistry, std::vector<double>& amounts);
  bool reach_ph(const LiquorSpec& liquor, const Chemistry& chemistry, double temperature, std::vector<double>& amounts);
  const LiquorSpec& follow(const LiquorSpec& liquor) const;

  const SpeciesLibrary& library_;
  const std::map<std::string, LiquorSpec>& named_;
  Diagnostics& diagnostics_;
};

}  // namespace leat
