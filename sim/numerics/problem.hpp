#pragma once
#include <span>
#include <string>
#include <vector>

namespace leat {

// Positions of the entries of a sparse Jacobian, by columns. Fixed once; zeros are stored.
struct SparsityPattern {
  int size = 0;
  std::vector<int> column_begin;  // size + 1 entries
  std::vector<int> row;           // ascending in each column
};

// F(x) = 0. A function answers false where it cannot be evaluated at x (a value is not finite, an inner solve
// failed); the solver then shortens its step. `complaint` keeps the reason of the last false.
class NonlinearProblem {
 public:
  virtual ~NonlinearProblem() = default;
  virtual int size() const = 0;
  virtual bool residual(std::span<const double> x, std::span<double> f) = 0;
  // Values in column-major order: dense n x n, or along the pattern where there is one.
  virtual bool jacobian(std::span<const double> x, std::span<double> values) = 0;
  virtual const SparsityPattern* pattern() const { return nullptr; }
  virtual std::string equation_name(int row) const = 0;
  std::string complaint;
};

// y' = f(t, y), with quadratures z' = g(t, y) that follow without being controlled.
class TimeProblem {
 public:
  virtual ~TimeProblem() = default;
  virtual int size() const = 0;
  virtual int quadratures() const = 0;
  virtual bool rates(double t, std::span<const double> y, std::span<double> dydt) = 0;
  virtual bool quadrature_rates(double t, std::span<const double> y, std::span<double> dzdt) = 0;
  virtual bool jacobian(double t, std::span<const double> y, std::span<double> values) = 0;
  virtual const SparsityPattern& pattern() const = 0;
  std::string complaint;
};

}  // namespace leat
