#include "models/units/thickener.hpp"

#include <fmt/format.h>

namespace leat {
namespace {

class Thickener final : public UnitOperationOf<Thickener> {
 public:
  Thickener(const UnitSettings& unit, const ProcessContext& context)
      : context_(&context), solids_fraction_(unit.values.at("solids_fraction")) {
    temperature_ = unit.temperature;
    traits_.outlets = {"overflow", "underflow"};
    traits_.cell = CellFrom::inlet;
    for (int s = 0; s < static_cast<int>(context.chemistry->phases.size()); ++s)
      if (context.chemistry->phases[s].may_form) phases_.push_back(s);
    for (int s : phases_) traits_.probes.push_back({ProbeKind::formed, s});
  }

  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
    const PulpLayout& layout = context_->layout;
    const int contents = layout.size();
    std::span<Real> over = out.outlets.subspan(0, contents), under = out.outlets.subspan(contents, contents);
    Real solids(0.0), liquor(0.0);
    for (int k = 0; k < contents; ++k) under[k] = Real(0.0);
    for (std::size_t p = 0; p < phases_.size(); ++p) {
      const PhaseRow& phase = context_->chemistry->phases[phases_[p]];
      for (const Share& share : phase.shares) under[share.component] += Real(share.coefficient) * in.probes[p];
      under[layout.water()] += Real(phase.water) * in.probes[p];
      solids += Real(phase.molar_mass) * in.probes[p];
    }
    for (int j = 0; j <= layout.components; ++j) {
      over[j] = in.inlet[j] - under[j];
      liquor += Real(context_->chemistry->component_mass[j]) * over[j];
    }
    for (int k = 0; k < layout.lots; ++k) {
      under[layout.lot(k)] = in.inlet[layout.lot(k)];
      over[layout.lot(k)] = Real(0.0);
      solids += Real(context_->lots[k].molar_mass) * in.inlet[layout.lot(k)];
    }
    Real share(0.0);
    if (value_of(liquor) > 0) share = solids * Real((1 - solids_fraction_) / solids_fraction_) / liquor;
    if (value_of(share) > 1) share = Real(1.0);  // objection() reports it if the solution stays there
    for (int j = 0; j <= layout.components; ++j) {
      const Real carried = share * over[j];
      under[j] += carried;
      over[j] -= carried;
    }
  }

  std::string objection(const UnitView<double>& in) const override {
    const PulpLayout& layout = context_->layout;
    double solids = 0, mass = 0;
    for (std::size_t p = 0; p < phases_.size(); ++p)
      solids += context_->chemistry->phases[phases_[p]].molar_mass * in.probes[p];
    for (int k = 0; k < layout.lots; ++k) solids += context_->lots[k].molar_mass * in.inlet[layout.lot(k)];
    for (int j = 0; j <= layout.components; ++j) mass += context_->chemistry->component_mass[j] * in.inlet[j];
    for (int k = 0; k < layout.lots; ++k) mass += context_->lots[k].molar_mass * in.inlet[layout.lot(k)];
    if (mass > 0 && solids > solids_fraction_ * mass)
      return fmt::format("cannot thicken: its feed has {:.1f} % solids, its underflow is asked for {:.1f} %", 100 * solids / mass,
                         100 * solids_fraction_);
    return {};
  }

 private:
  const ProcessContext* context_;
  double solids_fraction_;  // of the underflow [kg/kg]
  std::vector<int> phases_;
};

}  // namespace

UnitKind thickener_kind() {
  UnitKind kind;
  kind.name = "thickener";
  kind.summary = "settles a pulp into clear overflow and thickened underflow";
  kind.parameters = {{"solids_fraction", "1", true, {}, 0.01, 0.95, "mass of solids per mass of underflow pulp", ""}};
  kind.make = [](const UnitSettings& unit, const ProcessContext& context) { return std::make_unique<Thickener>(unit, context); };
  return kind;
}

}  // namespace leat
