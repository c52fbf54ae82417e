#pragma once
#include "models/process/catalogue.hpp"
#include "models/process/unit_operation.hpp"

namespace leat {

// A well-mixed vessel of pulp: the common part of tank and surge.
//   dN/dt = in - q N + sum of dissolving lots + gas transfer        [mol/s],   q = Q / V(contents)
//   dQ/dt = ( sum_k v_k sources_k + (V - V_live)/tau_c - Q ) / tau_q [m3/s2],   v_k = dV/d(contents_k)
// The state Q makes the outlet an explicit function of the vessel, so that recycles need no algebraic equation; at
// rest V = V_live and Q is the volume made. With a pumped draw Q is that draw and V is free.
//   gas:     kla V_liquor (C* - C)   [mol/s]
//   assumes: perfect mixing; one temperature; local equilibrium of the liquor with formed solids
class MixedVessel : public UnitOperationOf<MixedVessel> {
 public:
  struct Settings {
    double volume = 0;       // live pulp volume [m3]
    double draw = 0;         // pumped outlet [m3/s]; 0: the outlet keeps the volume
    bool dissolves = true;
  };
  MixedVessel(const UnitSettings& unit, const ProcessContext& context, const Settings& settings);

  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const;
  std::vector<double> filled_with(std::span<const double> per_volume, double flow) const override;
  double live_volume() const override { return settings_.volume; }
  std::string objection(const UnitView<double>& in) const override;

 private:
  const ProcessContext* context_;
  Settings settings_;
  std::vector<GasContact> gases_;
};

}  // namespace leat
