#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// Surge: a pond or tank between others (MixedVessel). Without a draw it keeps its volume; with a pumped draw its
// volume is free and follows the flows through time. In a steady solve it keeps its stated volume.
UnitKind surge_kind();

}  // namespace leat
