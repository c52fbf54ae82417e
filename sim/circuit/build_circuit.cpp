#include "sim/circuit/build_circuit.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <exception>

#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"
#include "sim/circuit/circuit_joiner.hpp"
#include "sim/circuit/feed_maker.hpp"
#include "sim/circuit/chemistry_request.hpp"
#include "sim/circuit/library_overrides.hpp"

namespace leat {
namespace {

// Builds one form (steady or timed) of a circuit. Names and amounts were checked by the reader; here they are joined.
class CircuitBuilder {
 public:
  CircuitBuilder(const Flowsheet& flowsheet, const SpeciesLibrary& library, const Catalogue& catalogue, Diagnostics& diagnostics)
      : flowsheet_(flowsheet), library_(library), catalogue_(catalogue), diagnostics_(diagnostics),
        maker_(library, flowsheet.liquors, diagnostics) {}

  // Goes as far as it can, so that one pass tells every fault; nothing is returned after one.
  std::optional<BuiltCase> build(BuiltCase built) {
    attempt([&] { plan_ = plan_lots(flowsheet_, library_, diagnostics_); });
    attempt([&] { chemistry_ = compile(); });
    if (!chemistry_) return std::nullopt;
    pressure_ = pressure_at(flowsheet_.altitude);
    built.site_pressure = pressure_;
    built.at_equilibrium = plan_.at_equilibrium;
    for (const PhaseRow& phase : chemistry_->phases) (phase.may_form ? built.may_form : built.watched).push_back(phase.name);
    attempt([&] { make_context(); });
    if (!context_) return std::nullopt;
    attempt([&] { make_feeds(); });
    const CircuitParts parts{&flowsheet_, &library_, &catalogue_, &plan_,     chemistry_,  context_,
                             elements_,   feed_streams_, fresh_solids_, reagents_, dry_solids_, pressure_};
    attempt([&] { built.steady = join_circuit(parts, true, diagnostics_); });
    if (flowsheet_.history) attempt([&] { built.timed = join_circuit(parts, false, diagnostics_); });
    if (!diagnostics_.ok()) return std::nullopt;
    check_metals(*built.steady);
    check_needs(*built.steady);
    built.metals = flowsheet_.metals;
    if (flowsheet_.history && !flowsheet_.history->from_steady) built.start = fill(*built.timed);
    if (!diagnostics_.ok()) return std::nullopt;
    return built;
  }

 private:
  // After a fault a value may be missing that later steps count on; what then fails is a consequence and is not told.
  template <class Step>
  void attempt(Step&& step) {
    try {
      step();
    } catch (const std::exception&) {
      if (diagnostics_.ok()) throw;
    }
  }

  // A law that consumes what nothing brings will not run: said before it is solved.
  void check_needs(const Circuit& circuit) {
    for (std::size_t k = 0; k < plan_.entries.size(); ++k)
      for (const std::string& needed : plan_.entries[k].needed) {
        const int j = chemistry_->find_component(needed);
        bool brought = std::any_of(circuit.ledger_component.begin(), circuit.ledger_component.end(), [&](int component) { return component == j; });
        for (const CircuitStream& stream : feed_streams_) brought = brought || stream.feed[j] > 0;
        for (const Lot& lot : context_->lots) brought = brought || lot.products[j] > 0;
        if (!brought)
          diagnostics_.caution(Code::no_oxidant, plan_.entries[k].place,
                               plan_.entries[k].name + " needs " + needed + " to dissolve, and nothing brings it: no stream, mineral or gas");
      }
  }

  void check_metals(const Circuit& circuit) {
    std::vector<std::string> fed;
    for (std::size_t e = 0; e < circuit.elements.size(); ++e)
      if (circuit.fed_solids[e] > 0) fed.push_back(circuit.elements[e]);
    for (const std::string& metal : flowsheet_.metals)
      if (std::find(fed.begin(), fed.end(), metal) == fed.end())
        diagnostics_.fault(Code::unknown_name, flowsheet_.metals_place, "metals names '" + metal + "', which no solids bring in" + did_you_mean(metal, fed));
  }

  std::shared_ptr<const Chemistry> compile() {
    std::set<std::string> components = plan_.components;
    for (const auto& [name, liquor] : flowsheet_.liquors) maker_.collect(liquor, components);
    for (const SolidsSpec& solids : flowsheet_.solids) maker_.collect(solids.moisture_liquor, components);
    for (const ReagentSpec& reagent : flowsheet_.reagents)
      for (const NamedAmount& one : reagent.made_of) maker_.collect(one.name, one.amount.place, components);
    for (const StreamSpec& stream : flowsheet_.streams)
      if (stream.liquor) maker_.collect(*stream.liquor, components);
    if (flowsheet_.history)
      for (const FillingSpec& filling : flowsheet_.history->fillings) maker_.collect(filling.liquor, components);
    for (const UnitSpec& unit : flowsheet_.units)
      if (unit.gas) components.insert("O2");
    ChemistryRequest request = request_of(flowsheet_.chemistry, components, catalogue_);
    request.at_equilibrium = plan_.at_equilibrium;
    for (const LotPlan::Entry& entry : plan_.entries) request.minerals.push_back(entry.mineral);
    return compile_chemistry(library_, request, flowsheet_.chemistry.place, diagnostics_);
  }

  void make_context() {
    elements_ = chemistry_->elements;
    for (const LotPlan::Entry& entry : plan_.entries)
      if (const SolidEntry* solid = library_.find_solid(entry.mineral))
        for (const auto& [element, count] : solid->formula.atoms)
          if (std::find(elements_.begin(), elements_.end(), element) == elements_.end()) elements_.push_back(element);
    auto context = std::make_shared<ProcessContext>();
    context->chemistry = chemistry_.get();
    context->lots = make_lots(plan_, flowsheet_, library_, catalogue_, *chemistry_, elements_, maker_, diagnostics_);
    context->layout = {chemistry_->component_count(), static_cast<int>(context->lots.size())};
    context_ = context;
  }

  double temperature_of(const StreamSpec& stream) {
    if (stream.temperature) return *stream.temperature;
    if (flowsheet_.air_temperature) return *flowsheet_.air_temperature;
    diagnostics_.fault(Code::missing_key, stream.place, stream.name + " needs a temperature (or site needs an air_temperature)");
    return 298.15;
  }

  void make_feeds() {
    FeedMaker feeds(flowsheet_, library_, plan_, *context_, maker_, diagnostics_);
    for (const StreamSpec& stream : flowsheet_.streams) {
      if (stream.gas) continue;
      const double temperature = temperature_of(stream);
      CircuitStream made;
      made.name = stream.name;
      std::optional<Feed> feed;
      attempt([&] { feed = feeds.make(stream, temperature); });
      if (!feed) {  // its fault is told; the name is still a stream
        feed.emplace();
        feed->flow.assign(context_->layout.size(), 0.0);
      }
      made.feed = feed->flow;
      made.temperature = temperature;
      feed_streams_.push_back(made);
      dry_solids_ += feed->dry_solids;
      fresh_solids_.push_back(feed->dry_solids > 0);
      if (!feed->counted_as.empty()) reagents_.push_back({stream.name, feed->counted_as, feed->reagent});
    }
  }

  std::vector<double> fill(const Circuit& circuit) {
    std::vector<double> start(circuit.states, 0.0);
    for (int u : circuit.holding) {
      const CircuitUnit& unit = circuit.units[u];
      const FillingSpec* filling = nullptr;
      for (const FillingSpec& one : flowsheet_.history->fillings)
        if (one.unit == unit.name || (!filling && one.unit == "all") || unit.name.rfind(one.unit + ".", 0) == 0)
          filling = &one;
      if (!filling) {
        diagnostics_.fault(Code::missing_key, flowsheet_.history->place, "start does not say what " + unit.name + " holds; name it, or `all`");
        continue;
      }
      const auto amounts = maker_.per_volume(filling->liquor, *chemistry_, unit.operation->temperature());
      if (!amounts) continue;
      std::vector<double> contents(context_->layout.size(), 0.0);
      std::copy(amounts->begin(), amounts->end(), contents.begin());
      const std::vector<double> state = unit.operation->filled_with(contents, circuit.flow_scale);
      std::copy(state.begin(), state.end(), start.begin() + unit.first_state);
    }
    for (const FillingSpec& one : flowsheet_.history->fillings) {
      const bool known = one.unit == "all" || std::any_of(circuit.units.begin(), circuit.units.end(), [&](const CircuitUnit& unit) {
        return unit.name == one.unit || unit.name.rfind(one.unit + ".", 0) == 0;
      });
      if (!known) diagnostics_.fault(Code::unknown_name, one.liquor.place, "start names '" + one.unit + "', which is no vessel of the circuit");
    }
    return start;
  }

  const Flowsheet& flowsheet_;
  const SpeciesLibrary& library_;
  const Catalogue& catalogue_;
  Diagnostics& diagnostics_;
  LiquorMaker maker_;
  LotPlan plan_;
  std::shared_ptr<const Chemistry> chemistry_;
  std::shared_ptr<const ProcessContext> context_;
  std::vector<std::string> elements_;
  std::vector<CircuitStream> feed_streams_;
  std::vector<bool> fresh_solids_;
  std::vector<ReagentUse> reagents_;
  double dry_solids_ = 0, pressure_ = 101325;
};

}  // namespace

double pressure_at(double altitude) { return standard_atmosphere * std::pow(1 - 2.25577e-5 * altitude, 5.25588); }

std::optional<BuiltCase> build_circuit(const Flowsheet& flowsheet, const SpeciesLibrary& library, const Catalogue& catalogue,
                                       Diagnostics& diagnostics) {
  BuiltCase built;
  built.library = std::make_shared<SpeciesLibrary>(with_overrides(library, flowsheet.chemistry, diagnostics));
  return CircuitBuilder(flowsheet, *built.library, catalogue, diagnostics).build(built);
}

}  // namespace leat
