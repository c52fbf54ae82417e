#include "sim/numerics/kinsol.hpp"

#include <kinsol/kinsol.h>
#include <sunlinsol/sunlinsol_dense.h>
#include <sunlinsol/sunlinsol_klu.h>
#include <sunmatrix/sunmatrix_dense.h>
#include <sunmatrix/sunmatrix_sparse.h>

#include <algorithm>
#include <cmath>
#include <vector>

#include "models/core/check.hpp"
#include "sim/numerics/sundials_parts.hpp"

namespace leat {
namespace {

void ignore_messages(int, const char*, const char*, char*, void*) {}

bool all_finite(std::span<const double> values) {
  return std::all_of(values.begin(), values.end(), [](double v) { return std::isfinite(v); });
}

const char* flag_meaning(int flag) {
  switch (flag) {
    case KIN_LINESEARCH_NONCONV: return "the line search found no better point";
    case KIN_MAXITER_REACHED: return "too many iterations";
    case KIN_MXNEWT_5X_EXCEEDED: return "five steps of the largest length in a row";
    case KIN_LINESEARCH_BCFAIL: return "the line search could not keep the constraints";
    case KIN_LSETUP_FAIL: return "the Jacobian is singular";
    case KIN_LSOLVE_FAIL: return "the linear solve failed";
    case KIN_SYSFUNC_FAIL: return "the evaluation budget was used up";
    case KIN_FIRST_SYSFUNC_ERR: return "the equations cannot be evaluated at the start";
    case KIN_REPTD_SYSFUNC_ERR: return "the equations could not be evaluated at repeated trial points";
    default: return "Newton's method stopped";
  }
}

}  // namespace

struct KinsolSolver::Parts {
  NonlinearProblem* problem = nullptr;
  int size = 0;
  ContextOwner context;
  VectorOwner x, unknown_scale, residual_scale, positive;
  MatrixOwner matrix;
  LinearOwner linear;
  void* memory = nullptr;
  std::vector<double> check;
  int evaluations = 0, budget = 0;
  bool constrained = false;

  ~Parts() {
    if (memory) KINFree(&memory);
  }

  static int residual(N_Vector x, N_Vector f, void* user) {
    Parts& parts = *static_cast<Parts*>(user);
    if (++parts.evaluations > parts.budget) return -1;
    const std::size_t n = parts.size;
    std::span<double> out(N_VGetArrayPointer(f), n);
    std::fill(out.begin(), out.end(), std::nan(""));
    if (!parts.problem->residual({N_VGetArrayPointer(x), n}, out)) return 1;
    return all_finite(out) ? 0 : 1;
  }

  static int jacobian(N_Vector x, N_Vector, SUNMatrix matrix, void* user, N_Vector, N_Vector) {
    Parts& parts = *static_cast<Parts*>(user);
    const std::size_t n = parts.size;
    std::span<const double> at(N_VGetArrayPointer(x), n);
    if (const SparsityPattern* pattern = parts.problem->pattern()) {
      std::copy(pattern->column_begin.begin(), pattern->column_begin.end(), SUNSparseMatrix_IndexPointers(matrix));
      std::copy(pattern->row.begin(), pattern->row.end(), SUNSparseMatrix_IndexValues(matrix));
      std::span<double> values(SUNSparseMatrix_Data(matrix), pattern->row.size());
      return parts.problem->jacobian(at, values) && all_finite(values) ? 0 : 1;
    }
    std::span<double> values(SUNDenseMatrix_Data(matrix), n * n);
    return parts.problem->jacobian(at, values) && all_finite(values) ? 0 : 1;
  }
};

KinsolSolver::KinsolSolver(NonlinearProblem& problem) : parts_(std::make_unique<Parts>()) {
  Parts& p = *parts_;
  p.problem = &problem;
  p.size = problem.size();
  SUNContext context = p.context.context;
  for (VectorOwner* vector : {&p.x, &p.unknown_scale, &p.residual_scale, &p.positive})
    vector->reset(N_VNew_Serial(p.size, context));
  p.memory = KINCreate(context);
  check(p.memory != nullptr, "KINCreate failed");
  KINSetErrHandlerFn(p.memory, ignore_messages, nullptr);
  check(KINInit(p.memory, Parts::residual, p.x.get()) == KIN_SUCCESS, "KINInit failed");
  KINSetUserData(p.memory, &p);
  if (const SparsityPattern* pattern = problem.pattern()) {
    p.matrix.reset(SUNSparseMatrix(p.size, p.size, static_cast<sunindextype>(pattern->row.size()), CSC_MAT, context));
    p.linear.reset(SUNLinSol_KLU(p.x.get(), p.matrix.get(), context));
  } else {
    p.matrix.reset(SUNDenseMatrix(p.size, p.size, context));
    p.linear.reset(SUNLinSol_Dense(p.x.get(), p.matrix.get(), context));
  }
  check(KINSetLinearSolver(p.memory, p.linear.get(), p.matrix.get()) == KIN_SUCCESS, "KINSetLinearSolver failed");
  KINSetJacFn(p.memory, Parts::jacobian);
  KINSetMaxSetupCalls(p.memory, 1);
  p.check.resize(p.size);
}

KinsolSolver::~KinsolSolver() = default;
KinsolSolver::KinsolSolver(KinsolSolver&&) noexcept = default;
KinsolSolver& KinsolSolver::operator=(KinsolSolver&&) noexcept = default;

SolveReport KinsolSolver::solve(std::span<double> x, const KinsolSettings& settings, std::span<const double> unknown_scale,
                                std::span<const double> residual_scale, std::span<const double> positive) {
  Parts& p = *parts_;
  const auto fill = [&](N_Vector vector, std::span<const double> values, double otherwise) {
    double* data = N_VGetArrayPointer(vector);
    if (values.empty())
      std::fill(data, data + p.size, otherwise);
    else
      std::copy(values.begin(), values.end(), data);
  };
  fill(p.unknown_scale.get(), unknown_scale, 1);
  fill(p.residual_scale.get(), residual_scale, 1);
  fill(p.x.get(), x, 0);
  // Constraints once set are taken back by zeros: taking them back by a null vector ends the process.
  if (!positive.empty() || p.constrained) {
    fill(p.positive.get(), positive, 0);
    KINSetConstraints(p.memory, p.positive.get());
    p.constrained = true;
  }
  KINSetFuncNormTol(p.memory, settings.tolerance);
  KINSetScaledStepTol(p.memory, 1e-16);
  KINSetNumMaxIters(p.memory, settings.most_iterations);
  p.evaluations = 0;
  p.budget = settings.most_evaluations;
  const int flag = KINSol(p.memory, p.x.get(), settings.line_search ? KIN_LINESEARCH : KIN_NONE, p.unknown_scale.get(),
                          p.residual_scale.get());
  SolveReport report;
  long iterations = 0;
  KINGetNumNonlinSolvIters(p.memory, &iterations);
  report.iterations = static_cast<int>(iterations);
  std::copy_n(N_VGetArrayPointer(p.x.get()), p.size, x.begin());
  report.evaluations = p.evaluations;
  // The flag is not believed: NaN passes for success. The residual is looked at afresh.
  if (!p.problem->residual(x, p.check) || !all_finite(p.check)) {
    report.message = p.problem->complaint.empty() ? "the equations cannot be evaluated at the last point" : p.problem->complaint;
    return report;
  }
  const double* scale = N_VGetArrayPointer(p.residual_scale.get());
  int worst = 0;
  for (int i = 0; i < p.size; ++i) {
    const double size = std::abs(p.check[i] * scale[i]);
    if (size > report.largest_residual) report.largest_residual = size, worst = i;
  }
  report.worst = p.problem->equation_name(worst);
  report.ok = report.largest_residual <= 10 * settings.tolerance;
  if (!report.ok) report.message = flag_meaning(flag);
  return report;
}

}  // namespace leat
