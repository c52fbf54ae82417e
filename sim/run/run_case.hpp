#pragma once
#include <functional>

#include "sim/circuit/build_circuit.hpp"
#include "sim/run/run_result.hpp"

namespace leat {

struct RunOptions {
  Finish finish = Finish::own;                   // of the cells inside the circuit
  double relative_tolerance = 1e-8;              // of CVODE
  bool through_time = true;                      // run the history, if there is one
  std::function<void(double share)> progress;    // through time, 0 to 1; may be empty
  std::function<bool()> stop;                    // asked after each stored time; true ends the history there; may be empty
};

// Bounds a result must keep to be shown [1].
struct ClosureBounds {
  double steady = 1e-8, timed = 1e-7, charge = 1e-9, mass_action = 1e-8, cell_balance = 1e-9;
};

// Runs a built case: steady from cold, then through time if it has a history. Never throws for a failure to converge or
// to close: `failure` says which unit, equation and species.
RunResult run_case(const Flowsheet& flowsheet, const BuiltCase& built, const RunOptions& options = {});

// What in a snapshot misses its bound; empty if it closes.
std::string closure_fault(const Closures& closures, bool timed, const ClosureBounds& bounds = {});

}  // namespace leat
