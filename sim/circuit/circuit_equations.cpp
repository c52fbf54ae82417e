#include "sim/circuit/circuit_equations.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <set>

#include "models/core/check.hpp"

namespace leat {

CircuitEquations::CircuitEquations(std::shared_ptr<const Circuit> circuit, Finish finish)
    : circuit_(std::move(circuit)), solver_(circuit_->chemistry, finish) {
  const PulpLayout& layout = circuit_->context->layout;
  width_ = layout.size();
  chem_ = layout.components + 1;
  cells_.resize(circuit_->units.size());
  for (std::size_t u = 0; u < cells_.size(); ++u) {
    const UnitTraits& traits = circuit_->units[u].operation->traits();
    cells_[u].used = !traits.probes.empty() || (traits.hold_up && !circuit_->units[u].torn);
    cells_[u].probes.assign(traits.probes.size(), 0.0);
    cells_[u].speeds.assign(layout.lots, 0.0);
    cells_[u].volume_gradient.assign(chem_, 0.0);
    cells_[u].probe_slopes.assign(traits.probes.size() * chem_, 0.0);
    cells_[u].speed_slopes.assign(static_cast<std::size_t>(layout.lots) * chem_, 0.0);
  }
  flows_.assign(circuit_->streams.size() * width_, 0.0);
  for (std::size_t s = 0; s < circuit_->streams.size(); ++s)
    if (circuit_->streams[s].source < 0) std::copy(circuit_->streams[s].feed.begin(), circuit_->streams[s].feed.end(), flows_.begin() + s * width_);
  ledger_.assign(circuit_->ledgers, 0.0);
  inlet_.assign(width_, 0.0);
  stream_blocks_.resize(circuit_->streams.size());
  build_pattern();
}

void CircuitEquations::forget() {
  last_y_.clear();
  for (Cell& cell : cells_) cell.state.solved = false;
}

void CircuitEquations::inlet_of(int unit, std::span<double> inlet) const {
  std::fill(inlet.begin(), inlet.end(), 0.0);
  for (int s : circuit_->units[unit].takes)
    for (int k = 0; k < width_; ++k) inlet[k] += flows_[s * width_ + k];
}

bool CircuitEquations::solve_cell(int unit, std::span<const double> totals, bool slopes) {
  Cell& cell = cells_[unit];
  if (!cell.used) return true;
  const CircuitUnit& place = circuit_->units[unit];
  const UnitOperation& operation = *place.operation;
  const double temperature = operation.temperature();
  const SolveReport report = solver_.solve(totals, temperature, cell.state);
  if (!report.ok) {
    complaint = place.name + ": the equilibrium has no solution (" + report.message +
                (report.worst.empty() ? "" : ", worst: " + report.worst) + ")";
    return false;
  }
  const UnitTraits& traits = operation.traits();
  const std::span<const double> n = totals;
  // Volume gradient: what the outlet of a vessel follows. Without formed solids it needs no factorisation.
  const bool solids = !cell.state.active.empty();
  if (slopes || (traits.hold_up && solids)) {
    if (!solver_.linearise(n, temperature, cell.state)) {
      complaint = place.name + ": the equilibrium cannot be linearised";
      return false;
    }
  }
  if (traits.hold_up) {
    if (slopes || solids) {
      std::vector<double>& gradient = cell.volume_gradient;
      scratch_.assign(chem_, 0.0);
      solver_.probe({ProbeKind::liquor_volume, 0}, gradient);
      solver_.probe({ProbeKind::formed_volume, 0}, scratch_);
      for (int j = 0; j < chem_; ++j) gradient[j] += scratch_[j];
    } else {
      circuit_->chemistry->liquor_volume.volume(temperature, n, cell.volume_gradient);
    }
  }
  for (std::size_t p = 0; p < traits.probes.size(); ++p)
    cell.probes[p] = slopes ? solver_.probe(traits.probes[p], {cell.probe_slopes.data() + p * chem_, static_cast<std::size_t>(chem_)})
                            : solver_.probe_value(traits.probes[p], n, temperature, cell.state);
  if (!traits.dissolves) return true;
  const std::vector<Lot>& lots = circuit_->context->lots;
  std::array<double, 16> values{}, derivative{};
  for (std::size_t k = 0; k < lots.size(); ++k) {
    if (!lots[k].law) continue;
    const std::span<const Probe> asked = lots[k].law->probes();
    check(asked.size() <= values.size(), "a rate law asks for too many probes");
    double* slope = cell.speed_slopes.data() + k * chem_;
    std::fill(slope, slope + chem_, 0.0);
    if (slopes) {
      std::vector<double> each(asked.size() * chem_);
      for (std::size_t p = 0; p < asked.size(); ++p)
        values[p] = solver_.probe(asked[p], {each.data() + p * chem_, static_cast<std::size_t>(chem_)});
      cell.speeds[k] = lots[k].law->speed({values.data(), asked.size()}, temperature, {derivative.data(), asked.size()});
      for (std::size_t p = 0; p < asked.size(); ++p)
        for (int j = 0; j < chem_; ++j) slope[j] += derivative[p] * each[p * chem_ + j];
    } else {
      for (std::size_t p = 0; p < asked.size(); ++p) values[p] = solver_.probe_value(asked[p], n, temperature, cell.state);
      cell.speeds[k] = lots[k].law->speed({values.data(), asked.size()}, temperature, {derivative.data(), asked.size()});
    }
    if (!std::isfinite(cell.speeds[k]) || cell.speeds[k] < 0) {
      complaint = place.name + ": the law of " + lots[k].name + " gives no usable speed";
      return false;
    }
  }
  return true;
}

// What a model returns is distrusted: outputs are poisoned before, and looked at after.
bool CircuitEquations::run_unit(int unit, std::span<const double> state, std::span<const double> inlet,
                                std::span<double> rates, std::span<double> outlets, std::span<double> ledger) {
  const Cell& cell = cells_[unit];
  const UnitView<double> view{state, inlet, cell.probes, cell.speeds, cell.volume_gradient};
  UnitAnswer<double> answer{rates, outlets, ledger};
  for (std::span<double> out : {rates, outlets, ledger}) std::fill(out.begin(), out.end(), std::nan(""));
  const CircuitUnit& place = circuit_->units[unit];
  place.operation->evaluate(view, answer);
  const auto broken = [](std::span<const double> out) {
    for (std::size_t k = 0; k < out.size(); ++k)
      if (!std::isfinite(out[k])) return static_cast<int>(k);
    return -1;
  };
  const auto quantity = [&](int k) {
    if (k < chem_) return circuit_->chemistry->total_names[k];
    if (k < width_) return circuit_->context->lots[k - chem_].name;
    return place.operation->traits().state_names[k - width_];
  };
  if (const int k = broken(outlets); k >= 0)
    complaint = place.name + ": outlet " + place.operation->traits().outlets[k / width_] + " of " + quantity(k % width_) + " is not finite";
  else if (const int r = broken(rates); r >= 0)
    complaint = place.name + ": the rate of " + quantity(r) + " is not finite";
  else if (const int l = broken(ledger); l >= 0)
    complaint = place.name + ": what it takes up of " + place.operation->traits().ledger[l] + " is not finite";
  else
    return true;
  return false;
}

bool CircuitEquations::rates(std::span<const double> y, std::span<double> dydt) {
  const Circuit& c = *circuit_;
  // Solvers ask twice at one point (rates, then quadratures or a Jacobian): flows and cells are still those of y.
  if (!last_y_.empty() && std::equal(y.begin(), y.end(), last_y_.begin(), last_y_.end())) {
    std::copy(last_rates_.begin(), last_rates_.end(), dydt.begin());
    return true;
  }
  last_y_.clear();
  rates_scratch_.resize(c.states);
  const auto outlets_of = [&](const CircuitUnit& unit) {
    return std::span<double>(flows_.data() + unit.first_stream * width_, unit.operation->traits().outlets.size() * width_);
  };
  const auto ledger_of = [&](const CircuitUnit& unit) {
    return std::span<double>(ledger_.data() + unit.first_ledger, unit.operation->traits().ledger.size());
  };
  std::fill(inlet_.begin(), inlet_.end(), 0.0);
  for (int u : c.holding) {
    const CircuitUnit& unit = c.units[u];
    const std::span<const double> state = y.subspan(unit.first_state, unit.states);
    if (!solve_cell(u, state.first(chem_), false)) return false;
    if (!run_unit(u, state, inlet_, std::span<double>(rates_scratch_).subspan(unit.first_state, unit.states), outlets_of(unit), ledger_of(unit)))
      return false;
  }
  for (int u : c.passing) {
    const CircuitUnit& unit = c.units[u];
    inlet_of(u, inlet_);
    if (cells_[u].used && dry(inlet_)) {
      if (inlet_[chem_ - 1] < -1e-6 * 55500 * circuit_->flow_scale) {
        complaint = unit.name + ": pulp would flow backwards through it";
        return false;
      }
      if (std::any_of(inlet_.begin() + chem_, inlet_.end(), [&](double flow) { return flow > circuit_->flow_scale; })) {
        complaint = unit.name + ": solids without liquor reach it";
        return false;
      }
      std::fill(outlets_of(unit).begin(), outlets_of(unit).end(), 0.0);
      continue;
    }
    if (!solve_cell(u, std::span<const double>(inlet_).first(chem_), false)) return false;
    if (!run_unit(u, {}, inlet_, {}, outlets_of(unit), ledger_of(unit))) return false;
  }
  for (int u : c.holding) {
    const CircuitUnit& unit = c.units[u];
    inlet_of(u, inlet_);
    if (!run_unit(u, y.subspan(unit.first_state, unit.states), inlet_, dydt.subspan(unit.first_state, unit.states), outlets_of(unit),
                  ledger_of(unit)))
      return false;
  }
  last_y_.assign(y.begin(), y.end());
  last_rates_.assign(dydt.begin(), dydt.begin() + c.states);
  return true;
}

bool CircuitEquations::unit_rates(int u, std::span<const double> state, std::span<const double> inlet, std::span<double> rates) {
  const CircuitUnit& unit = circuit_->units[u];
  last_y_.clear();
  if (!solve_cell(u, state.first(chem_), false)) return false;
  const std::size_t outlets = unit.operation->traits().outlets.size(), ledgers = unit.operation->traits().ledger.size();
  return run_unit(u, state, inlet, rates, {flows_.data() + unit.first_stream * width_, outlets * width_},
                  {ledger_.data() + unit.first_ledger, ledgers});
}

// Nothing that a cell could be solved for reaches a unit: its outlets stand still.
bool CircuitEquations::dry(std::span<const double> inlet) const { return !(inlet[chem_ - 1] > 1e-9 * 55500 * circuit_->flow_scale); }

bool CircuitEquations::refresh_passing() {
  last_y_.clear();
  for (int u : circuit_->passing) {
    const CircuitUnit& unit = circuit_->units[u];
    inlet_of(u, inlet_);
    if (cells_[u].used && (dry(inlet_) || !solve_cell(u, std::span<const double>(inlet_).first(chem_), false))) continue;
    if (!run_unit(u, {}, inlet_, {}, {flows_.data() + unit.first_stream * width_, unit.operation->traits().outlets.size() * width_},
                  {ledger_.data() + unit.first_ledger, unit.operation->traits().ledger.size()}))
      return false;
  }
  return true;
}

std::string CircuitEquations::objection(std::span<const double> y) const {
  std::vector<double> inlet(width_);
  for (std::size_t u = 0; u < circuit_->units.size(); ++u) {
    const CircuitUnit& unit = circuit_->units[u];
    inlet_of(static_cast<int>(u), inlet);
    const std::span<const double> state = unit.operation->traits().hold_up ? y.subspan(unit.first_state, unit.states) : std::span<const double>{};
    const UnitView<double> view{state, inlet, cells_[u].probes, cells_[u].speeds, cells_[u].volume_gradient};
    if (unit.torn || (cells_[u].used && !unit.operation->traits().hold_up && dry(inlet))) continue;
    const std::string reason = unit.operation->objection(view);
    if (!reason.empty()) return unit.name + " " + reason;
  }
  return {};
}

void CircuitEquations::differentiate(int unit, std::span<const double> state, std::span<const double> inlet, Local& local) {
  const Cell& cell = cells_[unit];
  const UnitTraits& traits = circuit_->units[unit].operation->traits();
  const int ns = static_cast<int>(state.size()), np = static_cast<int>(cell.probes.size());
  const int nl = static_cast<int>(cell.speeds.size());
  const int outlets = static_cast<int>(traits.outlets.size()) * width_, ledgers = static_cast<int>(traits.ledger.size());
  local.columns = ns + width_ + np + nl;
  local.rows = ns + outlets + ledgers;
  local.values.assign(static_cast<std::size_t>(local.rows) * local.columns, 0.0);
  std::vector<Dual> in(local.columns), out(local.rows);
  const auto fill = [&](int begin, std::span<const double> values) {
    for (std::size_t k = 0; k < values.size(); ++k) in[begin + k] = Dual(values[k]);
  };
  fill(0, state);
  fill(ns, inlet);
  fill(ns + width_, cell.probes);
  fill(ns + width_ + np, cell.speeds);
  constexpr int lanes = 8;
  const std::span<const Dual> all(in);
  const UnitView<Dual> view{all.subspan(0, ns), all.subspan(ns, width_), all.subspan(ns + width_, np),
                            all.subspan(ns + width_ + np, nl), cell.volume_gradient};
  UnitAnswer<Dual> answer{std::span<Dual>(out).subspan(0, ns), std::span<Dual>(out).subspan(ns, outlets),
                          std::span<Dual>(out).subspan(ns + outlets, ledgers)};
  for (int begin = 0; begin < local.columns; begin += lanes) {
    const int end = std::min(begin + lanes, local.columns);
    for (int k = begin; k < end; ++k) in[k].slope[k - begin] = 1;
    circuit_->units[unit].operation->evaluate(view, answer);
    for (int r = 0; r < local.rows; ++r)
      for (int k = begin; k < end; ++k) local.values[static_cast<std::size_t>(r) * local.columns + k] = out[r].slope[k - begin];
    for (int k = begin; k < end; ++k) in[k].slope[k - begin] = 0;
  }
}

// Adds d(answer)/d(probes, speeds) x d(probes, speeds)/d(totals) to the columns the cell's totals come from, and keeps
// the state and inlet columns.
void CircuitEquations::fold_cell(int unit, const Local& local, bool state_cell, std::vector<double>& folded) {
  const Cell& cell = cells_[unit];
  const int np = static_cast<int>(cell.probes.size()), nl = static_cast<int>(cell.speeds.size());
  const int ns = local.columns - width_ - np - nl, kept = ns + width_;
  folded.assign(static_cast<std::size_t>(local.rows) * kept, 0.0);
  const int base = state_cell ? 0 : ns;
  for (int r = 0; r < local.rows; ++r) {
    const double* row = local.values.data() + static_cast<std::size_t>(r) * local.columns;
    double* to = folded.data() + static_cast<std::size_t>(r) * kept;
    std::copy(row, row + kept, to);
    for (int p = 0; p < np; ++p)
      if (row[kept + p] != 0)
        for (int j = 0; j < chem_; ++j) to[base + j] += row[kept + p] * cell.probe_slopes[p * chem_ + j];
    for (int k = 0; k < nl; ++k)
      if (row[kept + np + k] != 0)
        for (int j = 0; j < chem_; ++j) to[base + j] += row[kept + np + k] * cell.speed_slopes[static_cast<std::size_t>(k) * chem_ + j];
  }
}

void CircuitEquations::gather_blocks(int unit, std::vector<Block>& blocks) const {
  for (int s : circuit_->units[unit].takes)
    for (const Block& block : stream_blocks_[s]) {
      auto found = std::find_if(blocks.begin(), blocks.end(), [&](const Block& one) { return one.unit == block.unit; });
      if (found == blocks.end()) {
        blocks.push_back(block);
      } else {
        for (std::size_t k = 0; k < block.values.size(); ++k) found->values[k] += block.values[k];
      }
    }
}

bool CircuitEquations::jacobian(std::span<const double> y, std::span<double> values) {
  const Circuit& c = *circuit_;
  rates_scratch_.resize(c.states);
  std::vector<double> dydt(c.states);
  if (!rates(y, dydt)) return false;  // flows at y
  std::fill(values.begin(), values.end(), 0.0);
  Local local;
  std::vector<std::vector<double>> own(c.units.size());  // folded derivative of holding units
  std::vector<double> inlet(width_);
  for (int u : c.holding) {
    const CircuitUnit& unit = c.units[u];
    const std::span<const double> state = y.subspan(unit.first_state, unit.states);
    if (!solve_cell(u, state.first(chem_), true)) return false;
    inlet_of(u, inlet);
    differentiate(u, state, inlet, local);
    fold_cell(u, local, true, own[u]);
    const int kept = unit.states + width_;
    const int outlets = static_cast<int>(unit.operation->traits().outlets.size());
    for (int o = 0; o < outlets; ++o) {
      Block block;
      block.unit = u;
      block.values.assign(static_cast<std::size_t>(width_) * unit.states, 0.0);
      for (int r = 0; r < width_; ++r)
        std::copy_n(own[u].data() + static_cast<std::size_t>(unit.states + o * width_ + r) * kept, unit.states,
                    block.values.data() + static_cast<std::size_t>(r) * unit.states);
      stream_blocks_[unit.first_stream + o] = {std::move(block)};
    }
  }
  std::vector<double> folded;
  for (int u : c.passing) {
    const CircuitUnit& unit = c.units[u];
    inlet_of(u, inlet);
    if (cells_[u].used && dry(inlet)) {
      for (std::size_t o = 0; o < unit.operation->traits().outlets.size(); ++o) stream_blocks_[unit.first_stream + o].clear();
      continue;
    }
    if (!solve_cell(u, std::span<const double>(inlet).first(chem_), true)) return false;
    differentiate(u, {}, inlet, local);
    fold_cell(u, local, false, folded);
    std::vector<Block> blocks;
    gather_blocks(u, blocks);
    const int outlets = static_cast<int>(unit.operation->traits().outlets.size());
    for (int o = 0; o < outlets; ++o) {
      std::vector<Block> made;
      for (const Block& block : blocks) {
        const int n = c.units[block.unit].states;
        Block out{block.unit, std::vector<double>(static_cast<std::size_t>(width_) * n, 0.0)};
        for (int r = 0; r < width_; ++r)
          for (int k = 0; k < width_; ++k) {
            const double factor = folded[static_cast<std::size_t>(o * width_ + r) * width_ + k];
            if (factor == 0) continue;
            const double* from = block.values.data() + static_cast<std::size_t>(k) * n;
            double* to = out.values.data() + static_cast<std::size_t>(r) * n;
            for (int m = 0; m < n; ++m) to[m] += factor * from[m];
          }
        made.push_back(std::move(out));
      }
      stream_blocks_[unit.first_stream + o] = std::move(made);
    }
  }
  // Rows of each holding unit: own states, then those of the units upstream of its inlet.
  for (int u : c.holding) {
    const CircuitUnit& unit = c.units[u];
    const int kept = unit.states + width_;
    std::vector<Block> blocks;
    gather_blocks(u, blocks);
    std::vector<double> column_values;
    for (int v : sources_[u]) {
      const CircuitUnit& source = c.units[v];
      const Block* block = nullptr;
      for (const Block& one : blocks)
        if (one.unit == v) block = &one;
      for (int r = 0; r < unit.states; ++r) {
        column_values.assign(source.states, 0.0);
        const double* row = own[u].data() + static_cast<std::size_t>(r) * kept;
        if (v == u) std::copy_n(row, unit.states, column_values.begin());
        if (block)
          for (int k = 0; k < width_; ++k) {
            const double factor = row[unit.states + k];
            if (factor == 0) continue;
            const double* from = block->values.data() + static_cast<std::size_t>(k) * source.states;
            for (int m = 0; m < source.states; ++m) column_values[m] += factor * from[m];
          }
        for (int m = 0; m < source.states; ++m) {
          const int column = source.first_state + m, wanted = unit.first_state + r;
          const auto begin = pattern_.row.begin() + pattern_.column_begin[column];
          const auto end = pattern_.row.begin() + pattern_.column_begin[column + 1];
          const auto at = std::lower_bound(begin, end, wanted);
          values[at - pattern_.row.begin()] = column_values[m];
        }
      }
    }
  }
  return true;
}

bool CircuitEquations::unit_jacobian(int u, std::span<const double> state, std::span<double> values) {
  const CircuitUnit& unit = circuit_->units[u];
  last_y_.clear();
  if (!solve_cell(u, state.first(chem_), true)) return false;
  Local local;
  std::vector<double> folded, inlet(width_, 0.0);
  differentiate(u, state, inlet, local);
  fold_cell(u, local, true, folded);
  const int kept = unit.states + width_;
  for (int r = 0; r < unit.states; ++r)
    for (int k = 0; k < unit.states; ++k)
      values[static_cast<std::size_t>(k) * unit.states + r] = folded[static_cast<std::size_t>(r) * kept + k];
  return true;
}

void CircuitEquations::build_pattern() {
  const Circuit& c = *circuit_;
  // Units whose states reach each stream, through units that only pass on.
  std::vector<std::set<int>> reach(c.streams.size());
  for (int u : c.holding)
    for (std::size_t o = 0; o < c.units[u].operation->traits().outlets.size(); ++o) reach[c.units[u].first_stream + o] = {u};
  for (int u : c.passing) {
    std::set<int> all;
    for (int s : c.units[u].takes) all.insert(reach[s].begin(), reach[s].end());
    for (std::size_t o = 0; o < c.units[u].operation->traits().outlets.size(); ++o) reach[c.units[u].first_stream + o] = all;
  }
  sources_.resize(c.units.size());
  std::vector<std::set<int>> rows(c.states);
  for (int u : c.holding) {
    std::set<int> all = {u};
    for (int s : c.units[u].takes) all.insert(reach[s].begin(), reach[s].end());
    sources_[u].assign(all.begin(), all.end());
    for (int v : all)
      for (int m = 0; m < c.units[v].states; ++m)
        for (int r = 0; r < c.units[u].states; ++r) rows[c.units[v].first_state + m].insert(c.units[u].first_state + r);
  }
  pattern_.size = c.states;
  pattern_.column_begin.assign(1, 0);
  for (int k = 0; k < c.states; ++k) {
    pattern_.row.insert(pattern_.row.end(), rows[k].begin(), rows[k].end());
    pattern_.column_begin.push_back(static_cast<int>(pattern_.row.size()));
  }
}

}  // namespace leat
