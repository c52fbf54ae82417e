#include "models/units/mixer.hpp"

namespace leat {
namespace {

class Mixer final : public UnitOperationOf<Mixer> {
 public:
  Mixer(const UnitSettings& unit, const ProcessContext& context) : context_(&context) {
    temperature_ = unit.temperature;
    traits_.outlets = {"joined"};
    traits_.cell = CellFrom::inlet;
  }
  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
    for (int k = 0; k < context_->layout.size(); ++k) out.outlets[k] = in.inlet[k];
  }

 private:
  const ProcessContext* context_;
};

}  // namespace

UnitKind mixer_kind() {
  UnitKind kind;
  kind.name = "mixer";
  kind.summary = "joins streams";
  kind.make = [](const UnitSettings& unit, const ProcessContext& context) { return std::make_unique<Mixer>(unit, context); };
  return kind;
}

}  // namespace leat
