#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// Dissolves within seconds of reaching a tank: first order with the time constant `within` (a salt such as halite).
//   g = (1 / within) x the factors of first order in saturation and in what it consumes   [1/s];  no orders
//   source: common practice, no source
LawKind at_once_kind();

}  // namespace leat
