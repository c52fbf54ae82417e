#pragma once
// Owners of SUNDIALS objects; included by the sources of this room only.
#include <memory>
#include <nvector/nvector_serial.h>
#include <sundials/sundials_context.h>
#include <sundials/sundials_linearsolver.h>
#include <sundials/sundials_matrix.h>
#include <stdexcept>

namespace leat {

struct ContextOwner {
  SUNContext context = nullptr;
  ContextOwner() {
    if (SUNContext_Create(nullptr, &context) != 0) throw std::runtime_error("SUNDIALS gave no context");
  }
  ~ContextOwner() { SUNContext_Free(&context); }
  ContextOwner(const ContextOwner&) = delete;
  ContextOwner& operator=(const ContextOwner&) = delete;
};

struct VectorFree {
  void operator()(N_Vector v) const { N_VDestroy(v); }
};
struct MatrixFree {
  void operator()(SUNMatrix m) const { SUNMatDestroy(m); }
};
struct LinearFree {
  void operator()(SUNLinearSolver s) const { SUNLinSolFree(s); }
};
using VectorOwner = std::unique_ptr<std::remove_pointer_t<N_Vector>, VectorFree>;
using MatrixOwner = std::unique_ptr<std::remove_pointer_t<SUNMatrix>, MatrixFree>;
using LinearOwner = std::unique_ptr<std::remove_pointer_t<SUNLinearSolver>, LinearFree>;

}  // namespace leat
