#pragma once
#include <string>

namespace leat {

// How a solve ended: a value, never an exception. `worst` and `advice` are for the person who reads the failure.
struct SolveReport {
  bool ok = false;
  int iterations = 0;
  int evaluations = 0;
  double largest_residual = 0;  // max norm of the scaled residual, computed afresh [1]
  std::string worst;            // name of the equation it belongs to
  std::string message;          // why it failed
};

}  // namespace leat
