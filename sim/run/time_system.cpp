#include "sim/run/time_system.hpp"

#include "sim/run/family_content.hpp"

namespace leat {

TimeSystem::TimeSystem(CircuitEquations& equations, std::vector<int> recovered)
    : equations_(equations), recovered_(std::move(recovered)) {
  const Circuit& circuit = equations.circuit();
  for (std::size_t s = 0; s < circuit.streams.size(); ++s)
    if (circuit.streams[s].taker < 0 && circuit.streams[s].source >= 0) leaving_.push_back(static_cast<int>(s));
  width_ = circuit.context->layout.size();
  scratch_.assign(circuit.states, 0.0);
}

int TimeSystem::quadratures() const {
  return static_cast<int>(left_size() + ledger_size() + recovered_.size() * equations_.circuit().chemistry->families.size());
}

bool TimeSystem::rates(double, std::span<const double> y, std::span<double> dydt) {
  if (equations_.rates(y, dydt)) return true;
  complaint = equations_.complaint;
  return false;
}

bool TimeSystem::quadrature_rates(double, std::span<const double> y, std::span<double> dzdt) {
  if (!equations_.rates(y, scratch_)) return false;
  const Circuit& circuit = equations_.circuit();
  std::size_t at = 0;
  for (int s : leaving_)
    for (double flow : equations_.stream(s)) dzdt[at++] = flow;
  for (double flow : equations_.ledger()) dzdt[at++] = flow;
  const std::size_t families = circuit.chemistry->families.size();
  const std::span<const double> flow = equations_.stream(circuit.pregnant_liquor);
  const int water = circuit.context->layout.water();
  const bool flows = flow[water] > 1e-9 * circuit.flow_scale;
  if (flows && !equations_.solver().solve(flow.first(water + 1), circuit.streams[circuit.pregnant_liquor].temperature, pregnant_).ok)
    return false;
  for (int element : recovered_)
    for (std::size_t f = 0; f < families; ++f)
      dzdt[at++] = flows ? family_content(circuit, element, static_cast<int>(f), pregnant_.molality) * pregnant_.solvent : 0;
  return true;
}

bool TimeSystem::jacobian(double, std::span<const double> y, std::span<double> values) { return equations_.jacobian(y, values); }

}  // namespace leat
