#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// Splitter: shares a stream out among named outlets, by share or by volume flow; one outlet takes the rest.
//   out_k = s_k in,   s_k given, or Q_k / V_in   [1];   states: none
//   assumes: every outlet has the same pulp
UnitKind splitter_kind();

}  // namespace leat
