#pragma once
#include <vector>

#include "sim/circuit/circuit_equations.hpp"
#include "sim/numerics/problem.hpp"

namespace leat {

// A circuit through time as CVODE sees it. Quadratures [mol]: what left by every leaving stream (PulpLayout order, stream
// after stream), what came in through the ledger, and the recovered elements by family in the pregnant liquor.
class TimeSystem final : public TimeProblem {
 public:
  TimeSystem(CircuitEquations& equations, std::vector<int> recovered);
  int size() const override { return equations_.size(); }
  int quadratures() const override;
  bool rates(double t, std::span<const double> y, std::span<double> dydt) override;
  bool quadrature_rates(double t, std::span<const double> y, std::span<double> dzdt) override;
  bool jacobian(double t, std::span<const double> y, std::span<double> values) override;
  const SparsityPattern& pattern() const override { return equations_.pattern(); }
  // Where the parts of the quadratures begin.
  std::size_t left_size() const { return leaving_.size() * width_; }
  std::size_t ledger_size() const { return equations_.circuit().ledgers; }

 private:
  CircuitEquations& equations_;
  std::vector<int> leaving_, recovered_;
  std::vector<double> scratch_;
  EquilibriumState pregnant_;
  std::size_t width_ = 0;
};

}  // namespace leat
