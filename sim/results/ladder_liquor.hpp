// ladder_liquor: what one solved case says of the liquor that a ladder looks at.
//   a circuit:  its pregnant liquor at steady state; solids, index and temperature are those of the vessel it comes from,
//               upstream through thickeners and splitters, which change no liquor. Missing where several liquors are mixed last.
//   a beaker:   the step named, else the last.
#pragma once

#include <string>
#include <vector>

#include "sim/results/result_set.hpp"

namespace leat {

struct LadderLiquor {
  double ph, ionic_strength, temperature;  // [1], [mol/kg], [K]
  double closure;                          // the worst of the case [1]
  std::vector<double> molality;            // per species [mol/kg]
  std::vector<double> dissolved;           // per component [mol/m3 of liquor]
  std::vector<double> formed;              // per mineral [mol/m3 of liquor]
  std::vector<double> saturation_index;    // per mineral [log10]
};

// Of the results of a run with a steady state, or of a beaker that has the step.
LadderLiquor liquor_of(const ResultSet& results, const std::string& step);

}  // namespace leat
