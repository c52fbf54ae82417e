#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// Tank: a stirred leach tank that overflows at its live volume; lots dissolve, a gas may be sparged (MixedVessel).
UnitKind tank_kind();

}  // namespace leat
