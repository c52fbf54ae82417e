#include "models/register/register_models.hpp"

#include "models/activity/davies.hpp"
#include "models/activity/ideal.hpp"
#include "models/rates/at_once.hpp"
#include "models/rates/first_order.hpp"
#include "models/units/mixer.hpp"
#include "models/units/splitter.hpp"
#include "models/units/surge.hpp"
#include "models/units/tank.hpp"
#include "models/units/thickener.hpp"

namespace leat {

Catalogue register_models() {
  Catalogue catalogue;
  catalogue.activity["ideal"] = make_ideal_activity;
  catalogue.activity["davies"] = make_davies_activity;
  for (const LawKind& kind : {first_order_kind(), at_once_kind()}) catalogue.laws[kind.name] = kind;
  for (const UnitKind& kind : {mixer_kind(), splitter_kind(), surge_kind(), tank_kind(), thickener_kind()})
    catalogue.units[kind.name] = kind;
  catalogue.expansions["train"] = {"train", "tanks in series", "tank", "tanks"};
  return catalogue;
}

}  // namespace leat
