#pragma once
#include "models/chemistry/species_library.hpp"
#include "models/core/diagnostics.hpp"
#include "sim/circuit/flowsheet.hpp"

namespace leat {

// A copy of the library with the flowsheet's own constants, marked as the user's everywhere they show. New species
// and solids need a reaction; the stated value is at 25 degC unless a temperature stands with it.
SpeciesLibrary with_overrides(const SpeciesLibrary& library, const ChemistrySpec& chemistry, Diagnostics& diagnostics);

}  // namespace leat
