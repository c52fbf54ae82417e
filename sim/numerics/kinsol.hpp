#pragma once
#include <memory>
#include <span>

#include "sim/numerics/problem.hpp"
#include "sim/numerics/solve_report.hpp"

namespace leat {

struct KinsolSettings {
  double tolerance = 1e-11;       // max norm of the scaled residual [1]
  int most_iterations = 100;
  int most_evaluations = 5000;    // a budget: a line search can repeat itself for ever
  bool line_search = true;
};

// Newton's method of KINSOL, with the dense or, where the problem has a pattern, the KLU linear solver. One object
// serves one problem size; its memory is made once. Not shared between threads.
class KinsolSolver {
 public:
  // `problem` must outlive the solver.
  explicit KinsolSolver(NonlinearProblem& problem);
  ~KinsolSolver();
  KinsolSolver(KinsolSolver&&) noexcept;
  KinsolSolver& operator=(KinsolSolver&&) noexcept;

  // Improves x in place. `unknown_scale` and `residual_scale` multiply (1/typical size), empty: ones. `positive`:
  // 1 keeps an unknown >= 0, 0 leaves it free; empty: all free. Success is judged by the residual evaluated afresh.
  SolveReport solve(std::span<double> x, const KinsolSettings& settings, std::span<const double> unknown_scale = {},
                    std::span<const double> residual_scale = {}, std::span<const double> positive = {});

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

}  // namespace leat
