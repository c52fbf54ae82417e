#pragma once
#include <span>

#include "sim/circuit/circuit.hpp"

namespace leat {

// Content of a circuit element in the dissolved species of one family [mol/kg solvent].
double family_content(const Circuit& circuit, int element, int family, std::span<const double> molality);

}  // namespace leat
