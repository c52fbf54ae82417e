#include "models/rates/at_once.hpp"

#include "models/rates/first_order.hpp"

namespace leat {

LawKind at_once_kind() {
  LawKind kind;
  kind.name = "at_once";
  kind.summary = "dissolves within seconds";
  kind.parameters = {{"within", "s", false, 10.0, 0.1, 3600, "time constant", "common practice, no source"}};
  kind.takes_orders = false;
  kind.make = [](const LawSettings& settings) {
    LawSettings fast = settings;
    fast.values["constant"] = 1 / settings.values.at("within");
    return make_first_order("at_once", fast);
  };
  return kind;
}

}  // namespace leat
