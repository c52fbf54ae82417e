#include "sim/run/snapshot_maker.hpp"

#include <algorithm>
#include <cmath>

#include "sim/run/family_content.hpp"

namespace leat {

SnapshotMaker::SnapshotMaker(CircuitEquations& equations, const RunResult& result)
    : equations_(equations), result_(result), circuit_(equations.circuit()) {
  stream_cells_.resize(circuit_.streams.size());
  for (std::size_t s = 0; s < circuit_.streams.size(); ++s)
    if (circuit_.streams[s].taker < 0 && circuit_.streams[s].source >= 0) leaving_.push_back(static_cast<int>(s));
}

bool SnapshotMaker::make(std::span<const double> y, double time, const Crossed* crossed, Snapshot& out) {
  std::vector<double> rates(y.size());
  if (!equations_.rates(y, rates)) {
    complaint = equations_.complaint;
    return false;
  }
  out.time = time;
  out.units.resize(result_.vessels.size());
  for (std::size_t v = 0; v < result_.vessels.size(); ++v) unit(static_cast<int>(v), y, out.units[v]);
  out.streams.resize(circuit_.streams.size());
  for (std::size_t s = 0; s < circuit_.streams.size(); ++s)
    if (!stream(static_cast<int>(s), out.streams[s])) return false;
  out.ledger.assign(equations_.ledger().begin(), equations_.ledger().end());
  recoveries(crossed, y, out);
  closures(y, crossed, out);
  return true;
}

void SnapshotMaker::unit(int vessel, std::span<const double> y, UnitSnapshot& out) {
  const int u = result_.vessels[vessel];
  const CircuitUnit& unit = circuit_.units[u];
  const Chemistry& c = *circuit_.chemistry;
  const PulpLayout& layout = circuit_.context->layout;
  const EquilibriumState& cell = *equations_.cell(u);
  const std::span<const double> contents = y.subspan(unit.first_state, unit.states);
  const std::span<const double> totals = contents.first(layout.components + 1);
  EquilibriumSolver& solver = equations_.solver();
  out.temperature = unit.operation->temperature();
  out.ph = cell.ph;
  out.ionic_strength = cell.ionic_strength;
  out.water_activity = cell.water_activity;
  out.molality = cell.molality;
  out.formed.assign(cell.phase_amount.begin(), cell.phase_amount.begin() + c.phases.size());
  out.saturation_index = cell.log10_omega;
  const double liquor = solver.probe_value({ProbeKind::liquor_volume, 0}, totals, out.temperature, cell);
  const double formed_volume = solver.probe_value({ProbeKind::formed_volume, 0}, totals, out.temperature, cell);
  const double formed_mass = solver.probe_value({ProbeKind::formed_mass, 0}, totals, out.temperature, cell);
  double liquor_mass = -formed_mass, solids = formed_mass;
  for (int j = 0; j <= layout.components; ++j) liquor_mass += totals[j] * c.component_mass[j];
  out.total.resize(layout.components);
  for (int j = 0; j < layout.components; ++j)
    out.total[j] = solver.probe_value({ProbeKind::total, j}, totals, out.temperature, cell);
  out.pulp_volume = liquor + formed_volume;
  out.lots.resize(layout.lots);
  out.dissolving.resize(layout.lots);
  out.clock_speed.assign(equations_.speeds(u).begin(), equations_.speeds(u).end());
  for (int k = 0; k < layout.lots; ++k) {
    out.lots[k] = contents[layout.lot(k)];
    out.dissolving[k] = out.clock_speed[k] * out.lots[k];
    out.pulp_volume += out.lots[k] * circuit_.context->lots[k].molar_volume;
    solids += out.lots[k] * circuit_.context->lots[k].molar_mass;
  }
  out.liquor_density = liquor_mass / liquor;
  out.water_per_volume = cell.solvent / liquor;
  out.solids_fraction = solids / (solids + liquor_mass);
  // Outlet flow: what leaves over what is held.
  const std::span<const double> leaving = equations_.stream(unit.first_stream);
  out.outlet_flow = out.pulp_volume * leaving[layout.water()] / contents[layout.water()];
  out.family.assign(result_.recovered.size() * c.families.size(), 0.0);
  for (std::size_t e = 0; e < result_.recovered.size(); ++e)
    for (std::size_t f = 0; f < c.families.size(); ++f)
      out.family[e * c.families.size() + f] =
          family_content(circuit_, result_.recovered[e], static_cast<int>(f), cell.molality) * cell.solvent / liquor;
}

bool SnapshotMaker::stream(int index, StreamSnapshot& out) {
  const Chemistry& c = *circuit_.chemistry;
  const PulpLayout& layout = circuit_.context->layout;
  const std::span<const double> flow = equations_.stream(index);
  out.flow.assign(flow.begin(), flow.end());
  out.formed.assign(c.phases.size(), 0.0);
  out.dissolved.assign(flow.begin(), flow.begin() + layout.components + 1);
  out.solids = out.mass = out.pulp_volume = out.liquor_volume = 0;
  out.ph = std::nan("");
  for (int k = 0; k < layout.lots; ++k) {
    out.solids += flow[layout.lot(k)] * circuit_.context->lots[k].molar_mass;
    out.pulp_volume += flow[layout.lot(k)] * circuit_.context->lots[k].molar_volume;
  }
  for (int j = 0; j <= layout.components; ++j) out.mass += flow[j] * c.component_mass[j];
  out.mass += out.solids;
  if (!(flow[layout.water()] > 1e-9 * circuit_.flow_scale)) return true;  // dry solids, or nothing
  EquilibriumState& cell = stream_cells_[index];
  const std::span<const double> totals = flow.first(layout.components + 1);
  const double temperature = circuit_.streams[index].temperature;
  const SolveReport report = equations_.solver().solve(totals, temperature, cell);
  if (!report.ok) {
    complaint = "stream " + circuit_.streams[index].name + ": the equilibrium has no solution (" + report.message + ")";
    return false;
  }
  out.ph = cell.ph;
  out.ionic_strength = cell.ionic_strength;
  out.molality = cell.molality;
  out.liquor_volume = equations_.solver().probe_value({ProbeKind::liquor_volume, 0}, totals, temperature, cell);
  out.water_per_volume = cell.solvent / out.liquor_volume;
  out.pulp_volume += out.liquor_volume + equations_.solver().probe_value({ProbeKind::formed_volume, 0}, totals, temperature, cell);
  out.solids += equations_.solver().probe_value({ProbeKind::formed_mass, 0}, totals, temperature, cell);
  for (std::size_t s = 0; s < c.phases.size(); ++s) {
    out.formed[s] = cell.phase_amount[s];
    for (const Share& share : c.phases[s].shares) out.dissolved[share.component] -= share.coefficient * cell.phase_amount[s];
    out.dissolved[layout.water()] -= c.phases[s].water * cell.phase_amount[s];
  }
  return true;
}

void SnapshotMaker::recoveries(const Crossed* crossed, std::span<const double> y, Snapshot& out) {
  const PulpLayout& layout = circuit_.context->layout;
  const std::size_t n = result_.recovered.size(), families = circuit_.chemistry->families.size();
  out.extraction_now.assign(n, std::nan(""));
  out.recovery_now.assign(n, std::nan(""));
  out.extraction_to_date.assign(n, std::nan(""));
  out.recovery_to_date.assign(n, std::nan(""));
  out.held_in_vessels.assign(n, 0.0);
  out.formed_leaving_now.assign(n, std::nan(""));
  families_of_pregnant(out);
  out.recovery_by_family_to_date.assign(n * families, std::nan(""));
  for (std::size_t e = 0; e < n; ++e) {
    const int element = result_.recovered[e];
    const double fed = circuit_.fed_solids[element];
    double undissolved = 0;
    for (int s : leaving_) undissolved += circuit_.element_in_lots(element, equations_.stream(s));
    // Formed solids that leave: of a mineral fed without a law they never dissolved, of others they have come down again.
    double formed = 0;
    bool at_equilibrium = false;
    const Chemistry& c = *circuit_.chemistry;
    for (std::size_t p = 0; p < c.phases.size(); ++p) {
      double atoms = 0;
      for (const Share& share : c.phases[p].shares) atoms += share.coefficient * circuit_.component_elements[share.component][element];
      at_equilibrium = at_equilibrium || (c.phases[p].at_equilibrium && atoms > 0);
      for (int s : leaving_) (c.phases[p].at_equilibrium ? undissolved : formed) += atoms * out.streams[s].formed[p];
    }
    out.extraction_now[e] = 1 - undissolved / fed;
    out.formed_leaving_now[e] = formed / fed;
    double recovered = 0;
    for (std::size_t f = 0; f < families; ++f) recovered += out.recovery_by_family[e * families + f];
    out.recovery_now[e] = recovered;
    for (int u : result_.vessels)
      out.held_in_vessels[e] += circuit_.element_in_liquor(element, y.subspan(circuit_.units[u].first_state, layout.size()));
    if (!crossed || !(crossed->time > 0)) continue;
    double left = 0;
    for (std::size_t l = 0; l < leaving_.size(); ++l)
      left += circuit_.element_in_lots(element, std::span<const double>(crossed->left).subspan(l * layout.size(), layout.size()));
    // Undissolved equilibrium minerals are not among the integrals.
    if (!at_equilibrium) out.extraction_to_date[e] = 1 - left / (fed * crossed->time);
    double sum = 0;
    for (std::size_t f = 0; f < families; ++f) {
      const double value = crossed->family_to_date[e * families + f] / (fed * crossed->time);
      out.recovery_by_family_to_date[e * families + f] = value;
      sum += value;
    }
    out.recovery_to_date[e] = sum;
  }
}

void SnapshotMaker::families_of_pregnant(Snapshot& out) {
  const std::size_t n = result_.recovered.size(), families = circuit_.chemistry->families.size();
  out.recovery_by_family.assign(n * families, 0.0);
  const EquilibriumState& cell = stream_cells_[circuit_.pregnant_liquor];
  if (!cell.solved || !(equations_.stream(circuit_.pregnant_liquor)[circuit_.context->layout.water()] > 1e-9 * circuit_.flow_scale)) return;
  for (std::size_t e = 0; e < n; ++e)
    for (std::size_t f = 0; f < families; ++f)
      out.recovery_by_family[e * families + f] = family_content(circuit_, result_.recovered[e], static_cast<int>(f), cell.molality) *
                                                 cell.solvent / circuit_.fed_solids[result_.recovered[e]];
}

double SnapshotMaker::charge_miss(std::span<const double> amounts) const {
  const Chemistry& c = *circuit_.chemistry;
  double sum = 0, size = 0;
  for (int j = 0; j < c.component_count(); ++j) {
    sum += c.component_charge[j] * amounts[j];
    size += std::abs(c.component_charge[j] * amounts[j]);
  }
  const double least = 1e-9 * amounts[c.water()];
  return std::abs(sum) / std::max(size, std::max(least, 1e-300));
}

void SnapshotMaker::closures(std::span<const double> y, const Crossed* crossed, Snapshot& out) {
  const Chemistry& c = *circuit_.chemistry;
  const PulpLayout& layout = circuit_.context->layout;
  Closures& closures = out.closures;
  closures = {};
  // In, out and stored, as one pulp vector each: rates at a steady state, amounts since the start otherwise.
  std::vector<double> in(layout.size(), 0.0), left(layout.size(), 0.0), stored(layout.size(), 0.0), held(layout.size(), 0.0);
  const double span = crossed ? crossed->time : 1;
  for (const CircuitStream& stream : circuit_.streams)
    if (stream.source < 0 && stream.taker >= 0)
      for (int k = 0; k < layout.size(); ++k) in[k] += stream.feed[k] * span;
  for (std::size_t l = 0; l < circuit_.ledger_component.size(); ++l)
    in[circuit_.ledger_component[l]] += crossed ? crossed->taken[l] : out.ledger[l];
  for (std::size_t l = 0; l < leaving_.size(); ++l)
    for (int k = 0; k < layout.size(); ++k)
      left[k] += crossed ? crossed->left[l * layout.size() + k] : equations_.stream(leaving_[l])[k];
  for (int u : circuit_.holding)
    for (int k = 0; k < layout.size(); ++k) {
      if (circuit_.units[u].torn) continue;
      const double now = y[circuit_.units[u].first_state + k];
      held[k] += std::abs(now);
      if (crossed) stored[k] += now - crossed->start[circuit_.units[u].first_state + k];
    }
  double mass_in = 0, mass_miss = 0, mass_held = 0;
  for (std::size_t e = 0; e < circuit_.elements.size(); ++e) {
    const int element = static_cast<int>(e);
    const auto amount = [&](std::span<const double> pulp) { return circuit_.element_in_liquor(element, pulp) + circuit_.element_in_lots(element, pulp); };
    const double miss = amount(in) - amount(left) - amount(stored);
    const double size = std::max({std::abs(amount(in)), std::abs(amount(left)), crossed ? amount(held) : 0.0});
    const double relative = size > 0 ? std::abs(miss) / size : 0;
    const bool water = circuit_.elements[e] == "H" || circuit_.elements[e] == "O";
    double& worst = water ? closures.water : closures.elements;
    if (size > 1e-12 * circuit_.flow_scale && relative > worst) {
      worst = relative;
      if (!water) closures.worst_element = circuit_.elements[e];
    }
    mass_in += circuit_.element_mass[e] * std::abs(amount(in));
    mass_miss += circuit_.element_mass[e] * miss;
    mass_held += crossed ? circuit_.element_mass[e] * amount(held) : 0;
  }
  closures.mass = std::abs(mass_miss) / std::max(mass_in, mass_held);
  for (std::size_t v = 0; v < result_.vessels.size(); ++v) {
    const CircuitUnit& unit = circuit_.units[result_.vessels[v]];
    const std::span<const double> totals = y.subspan(unit.first_state, layout.components + 1);
    const auto cell = equations_.solver().closure(totals, unit.operation->temperature(), *equations_.cell(result_.vessels[v]));
    closures.charge = std::max(closures.charge, charge_miss(totals));
    if (cell.mass_action > closures.mass_action) closures.worst_cell = unit.name;
    if (cell.balance > closures.cell_balance) closures.worst_balance = unit.name;
    closures.mass_action = std::max(closures.mass_action, cell.mass_action);
    closures.cell_balance = std::max(closures.cell_balance, cell.balance);
  }
  for (std::size_t s = 0; s < circuit_.streams.size(); ++s) {
    const std::span<const double> totals = equations_.stream(static_cast<int>(s)).first(layout.components + 1);
    if (!(totals[c.water()] > 1e-9 * circuit_.flow_scale)) continue;
    closures.charge = std::max(closures.charge, charge_miss(totals));
    const auto cell = equations_.solver().closure(totals, circuit_.streams[s].temperature, stream_cells_[s]);
    if (cell.mass_action > closures.mass_action) closures.worst_cell = circuit_.streams[s].name;
    if (cell.balance > closures.cell_balance) closures.worst_balance = circuit_.streams[s].name;
    closures.mass_action = std::max(closures.mass_action, cell.mass_action);
    closures.cell_balance = std::max(closures.cell_balance, cell.balance);
  }
}

}  // namespace leat
