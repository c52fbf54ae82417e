#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// Mixer: joins streams.   out = sum of in [mol/s];   states: none;   assumes: no time passes, no reaction
UnitKind mixer_kind();

}  // namespace leat
