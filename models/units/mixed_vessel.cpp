#include "models/units/mixed_vessel.hpp"

namespace leat {
namespace {

constexpr double outlet_lag = 10;       // tau_q [s]
// tau_c [s]. Each vessel answers its inlet flow with (s tau_c + 1)/(tau_q tau_c s^2 + tau_c s + 1), whose peak gain is 1.12
// for tau_c = 4 tau_q (a start in eleven tanks drives flows backwards) and 1.005 for a hundred times.
constexpr double level_correction = 1000;
constexpr double empty = 0.01;          // share of the live volume under which a drawn vessel counts as empty

}  // namespace

MixedVessel::MixedVessel(const UnitSettings& unit, const ProcessContext& context, const Settings& settings)
    : context_(&context), settings_(settings), gases_(unit.gases) {
  temperature_ = unit.temperature;
  traits_.outlets = {"pulp"};
  traits_.hold_up = true;
  traits_.cell = CellFrom::state;
  traits_.probes = {{ProbeKind::liquor_volume, 0}, {ProbeKind::formed_volume, 0}};
  for (const GasContact& gas : gases_) {
    traits_.probes.push_back({ProbeKind::concentration, gas.species});
    traits_.ledger.push_back(gas.component);
  }
  traits_.dissolves = settings.dissolves;
  traits_.state_names = {"outlet pulp flow"};
  traits_.state_scales = {settings.volume / 3600};
}

template <class Real>
void MixedVessel::equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
  const PulpLayout& layout = context_->layout;
  const int contents = layout.size();
  Real volume = in.probes[0] + in.probes[1];
  for (int k = 0; k < layout.lots; ++k) volume += Real(context_->lots[k].molar_volume) * in.state[layout.lot(k)];
  const Real flow = settings_.draw > 0 ? Real(settings_.draw) : in.state[contents];
  const Real turnover = flow / volume;

  // Everything but the outlet first: the volume it makes drives the outlet flow.
  for (int k = 0; k < contents; ++k) out.rates[k] = in.inlet[k];
  if (traits_.dissolves)
    for (int k = 0; k < layout.lots; ++k) {
      const Lot& lot = context_->lots[k];
      if (!lot.law) continue;
      const Real dissolved = in.speeds[k] * in.state[layout.lot(k)];
      out.rates[layout.lot(k)] -= dissolved;
      for (int j = 0; j <= layout.components; ++j)
        if (lot.products[j] != 0) out.rates[j] += Real(lot.products[j]) * dissolved;
    }
  for (std::size_t g = 0; g < gases_.size(); ++g) {
    const Real taken = Real(gases_[g].transfer) * in.probes[0] * (Real(gases_[g].at_equilibrium) - in.probes[2 + g]);
    out.rates[gases_[g].component_index] += taken;
    out.ledger[g] = taken;
  }
  Real made(0.0);
  for (int j = 0; j <= layout.components; ++j) made += Real(in.volume_gradient[j]) * out.rates[j];
  for (int k = 0; k < layout.lots; ++k) made += Real(context_->lots[k].molar_volume) * out.rates[layout.lot(k)];
  if (settings_.draw > 0)
    out.rates[contents] = (Real(settings_.draw) - in.state[contents]) / Real(outlet_lag);
  else
    out.rates[contents] = (made + (volume - Real(settings_.volume)) / Real(level_correction) - flow) / Real(outlet_lag);
  for (int k = 0; k < contents; ++k) {
    const Real leaving = turnover * in.state[k];
    out.outlets[k] = leaving;
    out.rates[k] -= leaving;
  }
}

std::vector<double> MixedVessel::filled_with(std::span<const double> per_volume, double flow) const {
  std::vector<double> state;
  for (double amount : per_volume) state.push_back(amount * settings_.volume);
  state.push_back(settings_.draw > 0 ? settings_.draw : flow);
  return state;
}

std::string MixedVessel::objection(const UnitView<double>& in) const {
  const PulpLayout& layout = context_->layout;
  double volume = in.probes[0] + in.probes[1];
  for (int k = 0; k < layout.lots; ++k) volume += context_->lots[k].molar_volume * in.state[layout.lot(k)];
  if (settings_.draw > 0 && volume < empty * settings_.volume) return "has run empty: its draw is more than what enters";
  if (settings_.draw <= 0 && in.state[layout.size()] < 0) return "would have to take pulp in by its outlet: nothing flows through it";
  return {};
}

template void MixedVessel::equations(const UnitView<double>&, UnitAnswer<double>&) const;
template void MixedVessel::equations(const UnitView<Dual>&, UnitAnswer<Dual>&) const;

}  // namespace leat
