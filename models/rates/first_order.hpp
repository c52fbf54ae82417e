#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// First order in what is left of the lot:
//   g = k exp(-Ea/R (1/T - 1/T_at)) prod_i (c_i / c_at,i)^n_i  max(0, 1 - Omega)  prod_s c_s/(c_s + 1e-6 mol/L)   [1/s]
// The factor in Omega stands where the law runs to saturation, the last where it consumes a dissolved oxidant or
// reductant, so that it stops when there is none. Orders below one are made linear under a billionth of c_at.
//   source: first-order kinetics with Arrhenius temperature dependence, textbook; the approach to equilibrium
//           1 - Omega is the linear form of transition-state theory
LawKind first_order_kind();

// The law, under the name of a kind, from its settings (values: constant [1/s], activation_energy [J/mol], at_temperature [K]).
std::shared_ptr<const RateLaw> make_first_order(const std::string& name, const LawSettings& settings);

}  // namespace leat
