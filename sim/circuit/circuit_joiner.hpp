#pragma once
#include <memory>
#include <vector>

#include "models/process/catalogue.hpp"
#include "sim/circuit/circuit.hpp"
#include "sim/circuit/flowsheet.hpp"
#include "sim/circuit/lot_builder.hpp"

namespace leat {

// What is needed to join the units of a flowsheet, once its chemistry, lots and feeds are made. Borrowed pointers outlive it.
struct CircuitParts {
  const Flowsheet* flowsheet = nullptr;
  const SpeciesLibrary* library = nullptr;
  const Catalogue* catalogue = nullptr;
  const LotPlan* plan = nullptr;
  std::shared_ptr<const Chemistry> chemistry;
  std::shared_ptr<const ProcessContext> context;
  std::vector<std::string> elements;
  std::vector<CircuitStream> feed_streams;
  std::vector<bool> fresh_solids;       // per feed
  std::vector<ReagentUse> reagents;
  double dry_solids = 0;                // [kg/s]
  double pressure = 101325;             // of the site [Pa]
};

// Joins units and streams into a circuit for a steady solve or a run through time; faults (unknown names, streams taken
// twice or going nowhere, loops without hold-up) go to `diagnostics`.
std::shared_ptr<const Circuit> join_circuit(const CircuitParts& parts, bool steady, Diagnostics& diagnostics);

}  // namespace leat
