#pragma once
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "models/process/catalogue.hpp"
#include "sim/circuit/flowsheet.hpp"
#include "sim/equilibrium/equilibrium_solver.hpp"
#include "sim/run/run_result.hpp"

namespace leat {

// The beaker after one step.
struct BeakerStep {
  std::string name;
  double temperature = 298.15;             // [K]
  std::vector<double> totals;              // water last [mol]
  EquilibriumState state;
  double liquor_volume = 0;                // [m3]
  double liquor_density = 0;               // [kg/m3]
  std::vector<double> dissolved;           // per component, water last [mol]
  std::vector<double> added;               // amount of the compound dosed to reach a pH, if any [mol]
  std::string dosed;                       // which compound
  double proton_added = 0;                 // by a bare held pH [mol]
  std::vector<std::pair<std::string, double>> gas_taken_up;  // from held gases [mol]
  EquilibriumSolver::Closure closure;
  SolveReport report;
};

struct BeakerResult {
  std::shared_ptr<const Chemistry> chemistry;
  std::vector<BeakerStep> steps;
  std::vector<Caution> cautions;
  std::string failure;                     // which step, equation and species; empty if all is well
};

// Means and solves a beaker, step by step; each step starts warm from the one before. Faults of the file go to
// `diagnostics`, and nothing is returned then.
std::optional<BeakerResult> speciate(const BeakerSpec& beaker, const SpeciesLibrary& library, const Catalogue& catalogue,
                                     Diagnostics& diagnostics);

}  // namespace leat
