#pragma once
#include <memory>

#include "models/chemistry/activity_model.hpp"

namespace leat {

// Davies equation, C. W. Davies, Ion Association (1962); coefficient 0.3 (0.2 in the 1938 paper):
//   log10 gamma = -A z^2 ( sqrt(I)/(1 + sqrt(I)) - 0.3 I ),  uncharged species 0
//   ln a_w = -M_w sum m: the osmotic coefficient is taken as one
// assumes: I up to 1 mol/kg; I is held there beyond (the term in 0.3 I would otherwise grow without limit).
std::unique_ptr<ActivityModel> make_davies_activity();

}  // namespace leat
