#pragma once
#include "models/process/unit_operation.hpp"

namespace leat {

// Stands for one stream of a loop without hold-up, in steady solves only: its flow becomes unknowns of the Newton
// method.   d(flow)/dt = (in - flow) / 1 s,   out = flow
class TornStream final : public UnitOperationOf<TornStream> {
 public:
  explicit TornStream(int contents) : contents_(contents) {
    traits_.outlets = {"pulp"};
    traits_.hold_up = true;
  }
  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
    for (int k = 0; k < contents_; ++k) {
      out.outlets[k] = in.state[k];
      out.rates[k] = in.inlet[k] - in.state[k];
    }
  }

 private:
  int contents_;
};

}  // namespace leat
