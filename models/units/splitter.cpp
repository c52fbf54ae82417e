#include "models/units/splitter.hpp"

#include <fmt/format.h>

namespace leat {
namespace {

class Splitter final : public UnitOperationOf<Splitter> {
 public:
  Splitter(const UnitSettings& unit, const ProcessContext& context) : context_(&context), outlets_(unit.outlets) {
    temperature_ = unit.temperature;
    for (const OutletShare& outlet : outlets_) traits_.outlets.push_back(outlet.name);
    traits_.cell = CellFrom::inlet;
    for (const OutletShare& outlet : outlets_) by_volume_ = by_volume_ || outlet.volume_flow > 0;
    if (by_volume_) traits_.probes = {{ProbeKind::liquor_volume, 0}, {ProbeKind::formed_volume, 0}};
  }

  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
    const int contents = context_->layout.size();
    const Real volume = by_volume_ ? pulp_volume(in) : Real(1.0);
    Real rest(1.0);
    for (const OutletShare& outlet : outlets_)
      if (!outlet.rest) rest -= share_of(outlet, volume);
    for (std::size_t o = 0; o < outlets_.size(); ++o) {
      const Real share = outlets_[o].rest ? rest : share_of(outlets_[o], volume);
      for (int k = 0; k < contents; ++k) out.outlets[o * contents + k] = share * in.inlet[k];
    }
  }

  std::string objection(const UnitView<double>& in) const override {
    const double volume = by_volume_ ? pulp_volume(in) : 1;
    double asked = 0;
    for (const OutletShare& outlet : outlets_)
      if (!outlet.rest) asked += share_of(outlet, volume);
    if (asked > 1 + 1e-9 && !by_volume_) return fmt::format("cannot split: its outlets ask for {:.4g} % of what enters", 100 * asked);
    if (asked > 1 + 1e-9)
      return fmt::format("cannot split: its outlets ask for {:.4g} m3/h of the {:.4g} m3/h that enter", asked * volume * 3600, volume * 3600);
    return {};
  }

 private:
  template <class Real>
  Real pulp_volume(const UnitView<Real>& in) const {
    Real volume = in.probes[0] + in.probes[1];
    for (int k = 0; k < context_->layout.lots; ++k)
      volume += Real(context_->lots[k].molar_volume) * in.inlet[context_->layout.lot(k)];
    return volume;
  }
  template <class Real>
  static Real share_of(const OutletShare& outlet, const Real& volume) {
    return outlet.volume_flow > 0 ? Real(outlet.volume_flow) / volume : Real(outlet.share);
  }

  const ProcessContext* context_;
  std::vector<OutletShare> outlets_;
  bool by_volume_ = false;  // some outlet is a volume flow
};

}  // namespace

UnitKind splitter_kind() {
  UnitKind kind;
  kind.name = "splitter";
  kind.summary = "shares a stream out among named outlets";
  kind.named_outlets = true;
  kind.make = [](const UnitSettings& unit, const ProcessContext& context) { return std::make_unique<Splitter>(unit, context); };
  return kind;
}

}  // namespace leat
