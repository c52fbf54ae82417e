#pragma once
#include <memory>
#include <string>
#include <vector>

#include "models/chemistry/rate_law.hpp"

namespace leat {

// One mineral part that arrives in a feed and dissolves by its own law, or not at all. A lot never regrows; what forms
// again is a formed solid of the cell.
struct Lot {
  std::string name;                     // mineral, or mineral.part
  std::string mineral;
  std::string part;                     // empty if the mineral is one part
  double molar_mass = 0;                // [kg/mol]
  double molar_volume = 0;              // [m3/mol]
  std::vector<double> products;         // change of the liquor per mol dissolved, components then water [mol/mol]
  std::vector<double> elements;         // content per mol, in the order of the circuit's elements [mol/mol]
  std::shared_ptr<const RateLaw> law;   // null: inert
};

}  // namespace leat
