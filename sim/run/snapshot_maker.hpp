#pragma once
#include <vector>

#include "sim/circuit/circuit_equations.hpp"
#include "sim/run/run_result.hpp"

namespace leat {

// What has crossed the boundary since t = 0 [mol], for the balances over time.
struct Crossed {
  double time = 0;                          // [s]
  std::vector<double> left;                 // leaving stream after leaving stream, PulpLayout order
  std::vector<double> taken;                // ledger
  std::vector<double> start;                // state at t = 0
  std::vector<double> family_to_date;       // recovered element x family in the pregnant liquor
};

// Reads a solved circuit at one moment: vessels, streams, recoveries, closures. Keeps warm cells for the streams.
class SnapshotMaker {
 public:
  SnapshotMaker(CircuitEquations& equations, const RunResult& result);

  // Evaluates the circuit at y [mol ...] and time [s]; `crossed` is null for a steady state. False with `complaint` if a
  // stream has no equilibrium.
  bool make(std::span<const double> y, double time, const Crossed* crossed, Snapshot& out);
  std::string complaint;

 private:
  void unit(int vessel, std::span<const double> y, UnitSnapshot& out);
  bool stream(int index, StreamSnapshot& out);
  void recoveries(const Crossed* crossed, std::span<const double> y, Snapshot& out);
  void families_of_pregnant(Snapshot& out);
  void closures(std::span<const double> y, const Crossed* crossed, Snapshot& out);
  double charge_miss(std::span<const double> amounts) const;

  CircuitEquations& equations_;
  const RunResult& result_;
  const Circuit& circuit_;
  std::vector<EquilibriumState> stream_cells_;
  std::vector<int> leaving_;
};

}  // namespace leat
