#pragma once
#include <memory>
#include <span>

#include "sim/numerics/problem.hpp"
#include "sim/numerics/solve_report.hpp"

namespace leat {

struct CvodeSettings {
  double relative_tolerance = 1e-6;
  double newton_share = 1e-3;    // of the error test that Newton's method may leave over [1]
  double stale_step = 1e-9;      // change of the step size that a factorisation may outlive [1]
  long most_steps = 200000;      // between two output times
  double first_step = 0;         // [s]; 0: chosen by the solver
};

struct CvodeStatistics {
  long steps = 0, rate_evaluations = 0, jacobian_evaluations = 0, error_failures = 0, convergence_failures = 0;
};

// Variable-order BDF of CVODES with the KLU solver; quadratures follow without limiting a step. Not shared between threads.
class CvodeSolver {
 public:
  // `problem` must outlive the solver. absolute_tolerance has one entry per unknown.
  CvodeSolver(TimeProblem& problem, double t0, std::span<const double> y0, std::span<const double> absolute_tolerance,
              const CvodeSettings& settings);
  ~CvodeSolver();
  // Advances to exactly `t` [s]; y and the quadratures there are then at state() and quadrature().
  SolveReport advance(double t);
  std::span<const double> state() const;
  std::span<const double> quadrature() const;
  double time() const;
  CvodeStatistics statistics() const;

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

}  // namespace leat
