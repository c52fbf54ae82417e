#pragma once
#include <vector>

#include "models/core/diagnostics.hpp"
#include "sim/circuit/circuit.hpp"
#include "sim/circuit/flowsheet.hpp"

namespace leat {

// Puts the joined units in order: hold-up units by distance from the feeds with their places in the state vector, then
// those that pass on so that each has its inlets first. A loop without hold-up is torn for a steady solve (one stream
// becomes unknowns) and is a fault through time. `specs` are the units in circuit order, for their places in the file.
void order_circuit(Circuit& circuit, bool steady, const std::vector<UnitSpec>& specs, Diagnostics& diagnostics);

}  // namespace leat
