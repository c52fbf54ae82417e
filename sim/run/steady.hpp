#pragma once
#include <vector>

#include "sim/circuit/circuit_equations.hpp"
#include "sim/numerics/solve_report.hpp"

namespace leat {

struct SteadyReport {
  SolveReport stages;            // worst of the first sweep
  SolveReport circuit;           // the whole-circuit solve
  int sweeps = 0;
  bool through_time = false;     // the pseudo-transient was needed
  double seconds = 0;            // [s]
};

// Steady state of a circuit from cold: a sweep stage by stage, each stage by KINSOL, then every vessel at once by KINSOL
// with KLU on the same right-hand side; a pseudo-transient by CVODE behind it. y [mol ...] is the result.
SteadyReport solve_steady(CircuitEquations& equations, std::vector<double>& y);

// Typical size of every state, for scaling and absolute tolerances, in the state's unit.
std::vector<double> state_scales(const Circuit& circuit);

// Unit and quantity a state belongs to: "L.1: Ag(I)".
std::string state_name(const Circuit& circuit, int state);

}  // namespace leat
