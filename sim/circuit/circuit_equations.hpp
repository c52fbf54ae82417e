#pragma once
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "sim/circuit/circuit.hpp"
#include "sim/equilibrium/equilibrium_solver.hpp"
#include "sim/numerics/problem.hpp"

namespace leat {

// The right-hand side of a whole circuit and its derivative; one object serves KINSOL, CVODE and the ledger alike.
// It keeps one equilibrium state per cell as a warm start: not shared between threads, reset at the start of a run.
class CircuitEquations {
 public:
  explicit CircuitEquations(std::shared_ptr<const Circuit> circuit, Finish finish = Finish::own);

  const Circuit& circuit() const { return *circuit_; }
  int size() const { return circuit_->states; }
  const SparsityPattern& pattern() const { return pattern_; }

  void forget();  // cold cells at the next evaluation
  // dy/dt [mol/s ...]; false, with `complaint`, where a cell has no solution at y.
  bool rates(std::span<const double> y, std::span<double> dydt);
  // d(dy/dt)/dy along the pattern.
  bool jacobian(std::span<const double> y, std::span<double> values);
  // Derivative of one unit's rates with respect to its own states at fixed inlet, dense column-major.
  bool unit_jacobian(int unit, std::span<const double> y, std::span<double> values);
  // Rates of one unit at fixed inlet [mol/s].
  bool unit_rates(int unit, std::span<const double> state, std::span<const double> inlet, std::span<double> rates);

  // Valid after rates(): what flows and what the cells are.
  std::span<const double> stream(int s) const { return {flows_.data() + s * width_, static_cast<std::size_t>(width_)}; }
  std::span<const double> ledger() const { return ledger_; }              // [mol/s]
  const EquilibriumState* cell(int unit) const { return cells_[unit].used ? &cells_[unit].state : nullptr; }
  std::span<const double> speeds(int unit) const { return cells_[unit].speeds; }
  // First unit that cannot do what it is asked at y, with the reason; empty if all can.
  std::string objection(std::span<const double> y) const;
  EquilibriumSolver& solver() { return solver_; }
  std::string complaint;

  // Brings the units that only pass on up to date with the streams that reach them; those that nothing reaches, or
  // that have no equilibrium yet, are left. False if a unit gives what is not finite.
  bool refresh_passing();

  // Inlet of a unit as the sum of its streams, after rates().
  void inlet_of(int unit, std::span<double> inlet) const;

 private:
  struct Cell {
    bool used = false;
    EquilibriumState state;
    std::vector<double> probes, speeds, volume_gradient;
    std::vector<double> probe_slopes;  // probe x (components + 1)
    std::vector<double> speed_slopes;  // lot x (components + 1)
  };
  // d(flow)/d(states of one unit), width x states of it, row-major.
  struct Block {
    int unit = -1;
    std::vector<double> values;
  };
  // Dense derivative of a unit's answer with respect to state, inlet, probes and speeds, row-major.
  struct Local {
    int rows = 0, columns = 0;
    std::vector<double> values;
  };

  bool solve_cell(int unit, std::span<const double> totals, bool slopes);
  bool run_unit(int unit, std::span<const double> state, std::span<const double> inlet, std::span<double> rates,
                std::span<double> outlets, std::span<double> ledger);
  void differentiate(int unit, std::span<const double> state, std::span<const double> inlet, Local& local);
  void fold_cell(int unit, const Local& local, bool state_cell, std::vector<double>& folded);
  bool dry(std::span<const double> inlet) const;
  void build_pattern();
  void gather_blocks(int unit, std::vector<Block>& blocks) const;

  std::shared_ptr<const Circuit> circuit_;
  EquilibriumSolver solver_;
  int width_ = 0;      // of a flow
  int chem_ = 0;       // components with water
  std::vector<Cell> cells_;
  std::vector<double> flows_, ledger_, scratch_, inlet_, rates_scratch_;
  std::vector<double> last_y_, last_rates_;  // of the last evaluation; empty if cells or flows have moved since
  std::vector<std::vector<Block>> stream_blocks_;
  SparsityPattern pattern_;
  std::vector<std::vector<int>> sources_;  // per holding unit: units whose states its rates depend on, ascending
};

}  // namespace leat
