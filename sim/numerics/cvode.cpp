#include "sim/numerics/cvode.hpp"

#include <cvodes/cvodes.h>
#include <fmt/format.h>
#include <sunlinsol/sunlinsol_klu.h>
#include <sunmatrix/sunmatrix_sparse.h>
#include <sunnonlinsol/sunnonlinsol_newton.h>

#include <algorithm>
#include <cmath>

#include "models/core/check.hpp"
#include "sim/numerics/sundials_parts.hpp"

namespace leat {
namespace {

void ignore_messages(int, const char*, const char*, char*, void*) {}

bool all_finite(std::span<const double> values) {
  return std::all_of(values.begin(), values.end(), [](double v) { return std::isfinite(v); });
}

}  // namespace

struct NonlinearFree {
  void operator()(SUNNonlinearSolver s) const { SUNNonlinSolFree(s); }
};
using NonlinearOwner = std::unique_ptr<std::remove_pointer_t<SUNNonlinearSolver>, NonlinearFree>;

struct CvodeSolver::Parts {
  TimeProblem* problem = nullptr;
  std::size_t size = 0, quadratures = 0;
  ContextOwner context;
  VectorOwner y, absolute, z;
  MatrixOwner matrix;
  LinearOwner linear;
  NonlinearOwner newton;
  void* memory = nullptr;
  double t = 0, last_correction = 0;
  std::string complaint;
  ~Parts() {
    if (memory) CVodeFree(&memory);
  }

  static int converged(SUNNonlinearSolver solver, N_Vector, N_Vector correction, realtype tolerance, N_Vector weight, void* user);
  static int rates(double t, N_Vector y, N_Vector dydt, void* user) {
    Parts& p = *static_cast<Parts*>(user);
    std::span<double> out(N_VGetArrayPointer(dydt), p.size);
    std::fill(out.begin(), out.end(), std::nan(""));
    if (!p.problem->rates(t, {N_VGetArrayPointer(y), p.size}, out)) {
      p.complaint = p.problem->complaint;
      return 1;
    }
    if (all_finite(out)) return 0;
    p.complaint = "a rate is not finite";
    return 1;
  }
  static int quadrature(double t, N_Vector y, N_Vector dzdt, void* user) {
    Parts& p = *static_cast<Parts*>(user);
    return p.problem->quadrature_rates(t, {N_VGetArrayPointer(y), p.size}, {N_VGetArrayPointer(dzdt), p.quadratures}) ? 0 : 1;
  }
  static int jacobian(double t, N_Vector y, N_Vector, SUNMatrix matrix, void* user, N_Vector, N_Vector, N_Vector) {
    Parts& p = *static_cast<Parts*>(user);
    const SparsityPattern& pattern = p.problem->pattern();
    std::copy(pattern.column_begin.begin(), pattern.column_begin.end(), SUNSparseMatrix_IndexPointers(matrix));
    std::copy(pattern.row.begin(), pattern.row.end(), SUNSparseMatrix_IndexValues(matrix));
    std::span<double> values(SUNSparseMatrix_Data(matrix), pattern.row.size());
    return p.problem->jacobian(t, {N_VGetArrayPointer(y), p.size}, values) && all_finite(values) ? 0 : 1;
  }
};

// The solver's own test trusts the rate of convergence of earlier steps and may stop after one iteration; where a solid
// appears that rate is wrong, and what Newton's method leaves over is what the balances miss. Here the last correction
// itself must be within the tolerance.
int CvodeSolver::Parts::converged(SUNNonlinearSolver solver, N_Vector, N_Vector correction, realtype tolerance, N_Vector weight, void* user) {
  Parts& p = *static_cast<Parts*>(user);
  const double size = N_VWrmsNorm(correction, weight);
  int iteration = 0;
  SUNNonlinSolGetCurIter(solver, &iteration);
  if (size <= tolerance) return SUN_NLS_SUCCESS;
  if (iteration > 0 && size > 2 * p.last_correction) return SUN_NLS_CONV_RECVR;
  p.last_correction = size;
  return SUN_NLS_CONTINUE;
}

CvodeSolver::CvodeSolver(TimeProblem& problem, double t0, std::span<const double> y0,
                         std::span<const double> absolute_tolerance, const CvodeSettings& settings)
    : parts_(std::make_unique<Parts>()) {
  Parts& p = *parts_;
  p.problem = &problem;
  p.size = problem.size();
  p.quadratures = problem.quadratures();
  p.t = t0;
  SUNContext context = p.context.context;
  p.y.reset(N_VNew_Serial(p.size, context));
  p.absolute.reset(N_VNew_Serial(p.size, context));
  std::copy(y0.begin(), y0.end(), N_VGetArrayPointer(p.y.get()));
  std::copy(absolute_tolerance.begin(), absolute_tolerance.end(), N_VGetArrayPointer(p.absolute.get()));
  p.memory = CVodeCreate(CV_BDF, context);
  check(p.memory != nullptr, "CVodeCreate failed");
  CVodeSetErrHandlerFn(p.memory, ignore_messages, nullptr);
  check(CVodeInit(p.memory, Parts::rates, t0, p.y.get()) == CV_SUCCESS, "CVodeInit failed");
  CVodeSetUserData(p.memory, &p);
  CVodeSVtolerances(p.memory, settings.relative_tolerance, p.absolute.get());
  CVodeSetMaxNumSteps(p.memory, settings.most_steps);
  CVodeSetMaxConvFails(p.memory, 30);
  // Quadratures follow the rates, the states follow Newton's method: what it leaves over is what balances miss.
  CVodeSetNonlinConvCoef(p.memory, settings.newton_share);
  CVodeSetDeltaGammaMaxLSetup(p.memory, settings.stale_step);
  if (settings.first_step > 0) CVodeSetInitStep(p.memory, settings.first_step);
  const SparsityPattern& pattern = problem.pattern();
  p.matrix.reset(SUNSparseMatrix(p.size, p.size, static_cast<sunindextype>(pattern.row.size()), CSC_MAT, context));
  p.linear.reset(SUNLinSol_KLU(p.y.get(), p.matrix.get(), context));
  check(CVodeSetLinearSolver(p.memory, p.linear.get(), p.matrix.get()) == CV_SUCCESS, "CVodeSetLinearSolver failed");
  CVodeSetJacFn(p.memory, Parts::jacobian);
  p.newton.reset(SUNNonlinSol_Newton(p.y.get(), context));
  check(CVodeSetNonlinearSolver(p.memory, p.newton.get()) == CV_SUCCESS, "CVodeSetNonlinearSolver failed");
  check(SUNNonlinSolSetConvTestFn(p.newton.get(), Parts::converged, &p) == SUN_NLS_SUCCESS, "SUNNonlinSolSetConvTestFn failed");
  CVodeSetMaxNonlinIters(p.memory, 6);
  if (p.quadratures > 0) {
    p.z.reset(N_VNew_Serial(p.quadratures, context));
    N_VConst(0.0, p.z.get());
    CVodeQuadInit(p.memory, Parts::quadrature, p.z.get());
    // Carried with the history of the states, but with a tolerance that never limits a step: without the first the sums
    // over the boundary drift from what the states say.
    CVodeSetQuadErrCon(p.memory, 1);
    CVodeQuadSStolerances(p.memory, 0, 1e30);
  }
}

CvodeSolver::~CvodeSolver() = default;

SolveReport CvodeSolver::advance(double t) {
  Parts& p = *parts_;
  SolveReport report;
  if (t > p.t) {
    CVodeSetStopTime(p.memory, t);
    const int flag = CVode(p.memory, t, p.y.get(), &p.t, CV_NORMAL);
    if (flag < 0) {
      double reached = 0;
      CVodeGetCurrentTime(p.memory, &reached);
      report.message = fmt::format("the integration stopped at {:.6g} h (flag {}){}{}", reached / 3600, flag,
                                   p.complaint.empty() ? "" : ": ", p.complaint);
      return report;
    }
    if (p.quadratures > 0) {
      double at = 0;
      CVodeGetQuad(p.memory, &at, p.z.get());
    }
  }
  if (!all_finite(state())) {
    report.message = "a state is not finite";
    return report;
  }
  report.ok = true;
  return report;
}

std::span<const double> CvodeSolver::state() const { return {N_VGetArrayPointer(parts_->y.get()), parts_->size}; }
std::span<const double> CvodeSolver::quadrature() const {
  if (parts_->quadratures == 0) return {};
  return {N_VGetArrayPointer(parts_->z.get()), parts_->quadratures};
}
double CvodeSolver::time() const { return parts_->t; }

CvodeStatistics CvodeSolver::statistics() const {
  CvodeStatistics s;
  void* memory = parts_->memory;
  CVodeGetNumSteps(memory, &s.steps);
  CVodeGetNumRhsEvals(memory, &s.rate_evaluations);
  CVodeGetNumJacEvals(memory, &s.jacobian_evaluations);
  CVodeGetNumErrTestFails(memory, &s.error_failures);
  CVodeGetNumNonlinSolvConvFails(memory, &s.convergence_failures);
  return s;
}

}  // namespace leat
