#pragma once
#include "models/process/catalogue.hpp"
#include "models/process/unit_operation.hpp"

namespace leat {

// Thickener: settles a pulp into clear overflow and thickened underflow.
//   liquor:  L_under = S (1 - w)/w   [kg/s]   S solids (lots and formed), w solids fraction of the underflow
//   ports:   feed -> overflow, underflow      states: none
//   assumes: no reaction in the vessel; both outlets carry the same liquor; no solids in the overflow
//   source:  mass balance of sedimentation, common practice
UnitKind thickener_kind();

}  // namespace leat
