#include "models/units/tank.hpp"

#include "models/units/mixed_vessel.hpp"

namespace leat {

UnitKind tank_kind() {
  UnitKind kind;
  kind.name = "tank";
  kind.summary = "stirred leach tank that overflows at its live volume";
  kind.parameters = {{"volume", "m3", true, {}, 1e-6, 1e6, "live pulp volume", ""}};
  kind.takes_gas = true;
  kind.needs_temperature = true;
  kind.make = [](const UnitSettings& unit, const ProcessContext& context) {
    return std::make_unique<MixedVessel>(unit, context, MixedVessel::Settings{unit.values.at("volume"), 0, true});
  };
  return kind;
}

}  // namespace leat
