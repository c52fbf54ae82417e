#pragma once
#include <memory>
#include <optional>
#include <vector>

#include "models/process/catalogue.hpp"
#include "sim/circuit/circuit.hpp"
#include "sim/circuit/flowsheet.hpp"

namespace leat {

// A flowsheet built for a steady solve and, where it has a history, for a run through time.
struct BuiltCase {
  std::shared_ptr<const Circuit> steady;
  std::shared_ptr<const Circuit> timed;         // null without a history
  std::vector<double> start;                    // state at t = 0 from the fillings; empty if it starts from steady
  std::vector<std::string> at_equilibrium;      // fed minerals without a law
  std::vector<std::string> may_form, watched;   // candidate solids, and those whose index alone is reported
  std::vector<std::string> metals;              // whose recovery is reported; empty: every metal fed
  double site_pressure = 101325;                // [Pa]
  std::shared_ptr<const SpeciesLibrary> library;  // with the flowsheet's own constants
};

// Means the flowsheet; every fault in one pass goes to `diagnostics` and nothing is returned then.
std::optional<BuiltCase> build_circuit(const Flowsheet& flowsheet, const SpeciesLibrary& library, const Catalogue& catalogue,
                                       Diagnostics& diagnostics);

// Pressure of the standard atmosphere at an altitude [m] up to 11 km, ISO 2533:1975, constants from memory (2900 m gives 71.0 kPa) [Pa].
double pressure_at(double altitude);

}  // namespace leat
