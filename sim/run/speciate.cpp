#include "sim/run/speciate.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "sim/circuit/chemistry_request.hpp"
#include "sim/circuit/library_overrides.hpp"
#include "sim/circuit/liquor_maker.hpp"
#include "sim/run/cautions.hpp"

namespace leat {
namespace {

class Bench {
 public:
  Bench(const BeakerSpec& beaker, const SpeciesLibrary& library, const Catalogue& catalogue, Diagnostics& diagnostics)
      : beaker_(beaker), library_(library), catalogue_(catalogue), diagnostics_(diagnostics), maker_(library, none_, diagnostics) {}

  std::optional<BeakerResult> run() {
    chemistry_ = compile();
    if (!diagnostics_.ok()) return std::nullopt;
    solver_.emplace(chemistry_, Finish::kinsol);
    temperature_ = beaker_.temperature;
    const auto amounts = maker_.per_volume(beaker_.liquor, *chemistry_, temperature_);
    if (!amounts) return std::nullopt;
    totals_ = *amounts;
    for (double& one : totals_) one *= beaker_.volume;
    for (const NamedAmount& one : beaker_.add) add(one, {}, 1);
    reservoirs();
    if (!diagnostics_.ok()) return std::nullopt;
    std::vector<StepSpec> steps = beaker_.steps;
    if (steps.empty()) steps.push_back({});
    if (steps.front().name.empty()) steps.front().name = "mixed";
    for (const StepSpec& step : steps)
      if (!take(step)) break;
    if (!diagnostics_.ok()) return std::nullopt;
    watch_constants(*chemistry_, temperatures_, result_.cautions);
    result_.chemistry = chemistry_;
    return std::move(result_);
  }

 private:
  std::shared_ptr<const Chemistry> compile() {
    std::set<std::string> components;
    maker_.collect(beaker_.liquor, components);
    for (const NamedAmount& one : beaker_.add) maker_.collect(one.name, one.amount.place, components);
    for (const StepSpec& step : beaker_.steps) {
      for (const NamedAmount& one : step.add) maker_.collect(one.name, one.amount.place, components);
      for (const NamedAmount& one : step.as) maker_.collect(one.name, one.amount.place, components);
      if (!step.with.empty()) maker_.collect(step.with, step.place, components);
    }
    for (const auto& [name, pressure] : beaker_.gases) maker_.collect(name, pressure.second, components);
    ChemistryRequest request = request_of(beaker_.chemistry, components, catalogue_);
    // A solid put into the beaker takes part in the equilibrium.
    const auto put_in = [&](const std::vector<NamedAmount>& list) {
      for (const NamedAmount& one : list) {
        const SolidEntry* solid = library_.find_solid(one.name);
        if (!solid) continue;
        if (solid->constant) request.at_equilibrium.push_back(solid->name);
        else diagnostics_.fault(Code::no_law, one.amount.place, one.name + " has no solubility constant: a beaker at equilibrium cannot say how much dissolves");
      }
    };
    put_in(beaker_.add);
    for (const StepSpec& step : beaker_.steps) put_in(step.add);
    return compile_chemistry(library_, request, beaker_.chemistry.place, diagnostics_);
  }

  // At the present temperature: a gas follows it.
  void reservoirs() {
    held_.clear();
    const double ln10 = std::log(10.0);
    if (beaker_.held_ph) held_.push_back({"pH", {{chemistry_->hydrogen, 1.0}}, 0, -*beaker_.held_ph * ln10});
    for (const auto& [name, pressure] : beaker_.gases) {
      bool found = false;
      for (const GasRow& gas : chemistry_->gases) {
        const MassActionRow& row = chemistry_->species[gas.species];
        if (row.name != name && gas.name != name) continue;
        const double activity = std::log(chemistry_->henry(gas, temperature_) * pressure.first) - ln10 * chemistry_->log10_k(row, temperature_);
        held_.push_back({row.name, row.shares, row.water, activity});
        found = true;
      }
      if (!found) diagnostics_.fault(Code::unknown_name, pressure.second, "'" + name + "' is not a gas with a Henry constant in play here");
    }
  }

  // Adds `times` the typed amount, with the rest of the solution it comes in; returns the amount of the compound [mol].
  double add(const NamedAmount& one, const std::vector<NamedAmount>& as, double times) {
    double mass = 0;
    const auto row = maker_.row(one.name, one.amount.place, *chemistry_, mass);
    if (!row) return 0;
    double charge = 0;
    for (int j = 0; j < chemistry_->water(); ++j) charge += chemistry_->component_charge[j] * (*row)[j];
    if (std::abs(charge) > 1e-9)
      diagnostics_.fault(Code::does_not_balance, one.amount.place,
                         fmt::format("{} alone carries a charge of {:+.4g}; add a neutral compound", one.name, charge));
    double moles = 0;
    const Quantity& typed = one.amount.quantity;
    if (convertible(typed.unit, "mol")) moles = convert(typed, "mol");
    else if (convertible(typed.unit, "kg")) moles = convert(typed, "kg") / mass;
    else if (convertible(typed.unit, "m3") && (one.name == "water" || one.name == "H2O"))
      moles = convert(typed, "m3") * water_density(temperature_) / mass;
    else
      diagnostics_.fault(Code::wrong_unit, one.amount.place,
                         fmt::format("{} {} is not an amount of {}; write for example 0.1 mol or 5 g", typed.number, typed.unit, one.name));
    moles *= times;
    for (std::size_t j = 0; j < row->size(); ++j) totals_[j] += moles * (*row)[j];
    double own = 1, rest = 1;
    for (const NamedAmount& part : as)
      if (!part.amount.rest) rest -= convert(part.amount.quantity, "1");
    for (const NamedAmount& part : as)
      if (part.name == one.name) own = part.amount.rest ? rest : convert(part.amount.quantity, "1");
    for (const NamedAmount& part : as) {
      if (part.name == one.name) continue;
      double part_mass = 0;
      const auto other = maker_.row(part.name, part.amount.place, *chemistry_, part_mass);
      if (!other) continue;
      const double share = part.amount.rest ? rest : convert(part.amount.quantity, "1");
      for (std::size_t j = 0; j < other->size(); ++j) totals_[j] += moles * mass * share / own / part_mass * (*other)[j];
    }
    return moles;
  }

  bool take(const StepSpec& step) {
    BeakerStep out;
    out.name = step.name;
    bool acid = false;
    if (step.heat_to) {
      temperature_ = *step.heat_to;
      reservoirs();
    }
    for (const NamedAmount& one : step.add) {
      add(one, step.as, 1);
      acid = acid || is_acid(one.name);
    }
    if (!diagnostics_.ok()) return false;
    if (step.filter_off && state_.solved) filter_off();
    if (!solve(step.name)) return false;
    if (step.until_ph) {
      acid = acid || is_acid(step.with);
      if (!dose_to(step, out)) return false;
    }
    finish(out, acid || (beaker_.held_ph && -state_.phase_amount[chemistry_->phases.size()] > 0));
    return true;
  }

  bool is_acid(const std::string& compound) {
    ComponentAmounts amounts;
    std::string fault;
    double mass = 0;
    return components_of(library_, compound, amounts, mass, fault) && amounts.amounts["H^+"] > 0 && !amounts.amounts.count("NH3");
  }

  void filter_off() {
    for (std::size_t s = 0; s < chemistry_->phases.size(); ++s) {
      for (const Share& share : chemistry_->phases[s].shares) totals_[share.component] -= share.coefficient * state_.phase_amount[s];
      totals_[chemistry_->water()] -= chemistry_->phases[s].water * state_.phase_amount[s];
    }
  }

  bool solve(const std::string& step) {
    report_ = solver_->solve(totals_, temperature_, state_, held_);
    if (report_.ok) return true;
    result_.failure = fmt::format("step '{}' has no equilibrium: {}; worst equation {} ({:.2g})", step, report_.message, report_.worst, report_.largest_residual);
    return false;
  }

  // Doses until the pH is reached: bracket by doubling, then bisection with secant steps (regula falsi, Illinois form).
  bool dose_to(const StepSpec& step, BeakerStep& out) {
    const double target = *step.until_ph, ph_before = state_.ph;
    const std::vector<double> before = totals_;
    NamedAmount unit{step.with, {}};
    unit.amount.place = step.place;
    double low = 0, at_low = state_.ph - target, high = 1e-6 * before.back() / 55.5, at_high = at_low;
    const auto miss_at = [&](double moles, double& miss) {
      totals_ = before;
      unit.amount.quantity = {moles, "mol"};
      add(unit, step.as, 1);
      if (!solve(step.name)) return false;
      miss = state_.ph - target;
      return true;
    };
    while (at_high * at_low > 0) {
      high *= 2;
      if (high > 100 * before.back() / 55.5) {
        result_.failure = fmt::format("step '{}': no amount of {} brings the pH to {:.3g}: it is {:.3g} without any", step.name, step.with, target, ph_before);
        return false;
      }
      if (!miss_at(high, at_high)) return false;
      if (at_high * at_low > 0) low = high, at_low = at_high;
    }
    double moles = high, miss = at_high;
    for (int turn = 0; turn < 200 && std::abs(miss) > 1e-10 && high - low > 1e-15 * high; ++turn) {
      moles = (low * at_high - high * at_low) / (at_high - at_low);
      if (turn % 3 == 2 || !(moles > low && moles < high)) moles = 0.5 * (low + high);
      if (!miss_at(moles, miss)) return false;
      if (miss * at_low > 0) low = moles, at_low = miss;
      else high = moles, at_high = miss;
    }
    out.added = {moles};
    out.dosed = step.with;
    return true;
  }

  void finish(BeakerStep& out, bool acid) {
    const Chemistry& c = *chemistry_;
    out.temperature = temperature_;
    out.totals = totals_;
    out.state = state_;
    out.report = report_;
    out.dissolved = totals_;
    double mass = 0;
    for (std::size_t s = 0; s < c.phases.size(); ++s) {
      for (const Share& share : c.phases[s].shares) out.dissolved[share.component] -= share.coefficient * state_.phase_amount[s];
      out.dissolved[c.water()] -= c.phases[s].water * state_.phase_amount[s];
    }
    for (std::size_t r = 0; r < held_.size(); ++r) {
      const double taken = -state_.phase_amount[c.phases.size() + r];
      for (const Share& share : held_[r].shares) out.dissolved[share.component] += share.coefficient * taken;
      out.dissolved[c.water()] += held_[r].water * taken;
      if (held_[r].name == "pH") out.proton_added = taken;
      else out.gas_taken_up.emplace_back(held_[r].name, taken);
    }
    out.liquor_volume = c.liquor_volume.volume(temperature_, out.dissolved, {});
    for (std::size_t j = 0; j < out.dissolved.size(); ++j) mass += out.dissolved[j] * c.component_mass[j];
    out.liquor_density = mass / out.liquor_volume;
    std::vector<double> with_exchange = out.totals;
    for (std::size_t r = 0; r < held_.size(); ++r)
      for (const Share& share : held_[r].shares) with_exchange[share.component] += -share.coefficient * state_.phase_amount[c.phases.size() + r];
    for (std::size_t r = 0; r < held_.size(); ++r)
      with_exchange[c.water()] += -held_[r].water * state_.phase_amount[c.phases.size() + r];
    out.closure = solver_->closure(with_exchange, temperature_, state_);
    std::vector<double> per_volume;
    for (int j = 0; j < c.component_count(); ++j) per_volume.push_back(out.dissolved[j] / out.liquor_volume);
    watch_liquor(library_, c, 101325, {out.name, temperature_, state_.ph, state_.ionic_strength, state_.solvent / out.liquor_volume, &state_.molality, &per_volume, acid}, result_.cautions);
    watch_solids(c, out.name, state_.log10_omega, result_.cautions);
    temperatures_.push_back(temperature_);
    result_.steps.push_back(std::move(out));
  }

  const BeakerSpec& beaker_;
  const SpeciesLibrary& library_;
  const Catalogue& catalogue_;
  Diagnostics& diagnostics_;
  std::map<std::string, LiquorSpec> none_;
  LiquorMaker maker_;
  std::shared_ptr<const Chemistry> chemistry_;
  std::optional<EquilibriumSolver> solver_;
  std::vector<Reservoir> held_;
  std::vector<double> totals_;
  double temperature_ = 298.15;
  EquilibriumState state_;
  std::vector<double> temperatures_;  // met so far [K]
  SolveReport report_;
  BeakerResult result_;
};

}  // namespace

std::optional<BeakerResult> speciate(const BeakerSpec& beaker, const SpeciesLibrary& library, const Catalogue& catalogue,
                                     Diagnostics& diagnostics) {
  const SpeciesLibrary own = with_overrides(library, beaker.chemistry, diagnostics);
  return Bench(beaker, own, catalogue, diagnostics).run();
}

}  // namespace leat
