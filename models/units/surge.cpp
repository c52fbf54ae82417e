#include "models/units/surge.hpp"

#include "models/units/mixed_vessel.hpp"

namespace leat {

UnitKind surge_kind() {
  UnitKind kind;
  kind.name = "surge";
  kind.summary = "pond or tank whose volume is kept, or free with a pumped draw";
  kind.parameters = {{"volume", "m3", true, {}, 1e-6, 1e7, "volume kept, or at the start", ""},
                     {"draw", "m3/s", false, {}, 1e-9, 1e3, "pumped outlet", ""}};
  kind.needs_temperature = true;
  kind.make = [](const UnitSettings& unit, const ProcessContext& context) {
    const auto draw = unit.values.find("draw");
    const double pumped = draw == unit.values.end() || unit.steady ? 0 : draw->second;
    return std::make_unique<MixedVessel>(unit, context, MixedVessel::Settings{unit.values.at("volume"), pumped, true});
  };
  return kind;
}

}  // namespace leat
