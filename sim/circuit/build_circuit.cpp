#include "sim/circuit/build_circuit.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <functional>

#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"
#include "sim/circuit/feed_maker.hpp"
#include "sim/circuit/library_overrides.hpp"
#include "sim/circuit/torn_stream.hpp"

namespace leat {
namespace {

constexpr double oxygen_in_air = 0.209476;  // dry air, by volume; U.S. Standard Atmosphere 1976 [1]
constexpr double least_scale = 1e-6;        // share of the water's content a scale may not go under

// Builds one form (steady or timed) of a circuit. Names and amounts were checked by the reader; here they are joined.
class CircuitBuilder {
 public:
  CircuitBuilder(const Flowsheet& flowsheet, const SpeciesLibrary& library, const Catalogue& catalogue, Diagnostics& diagnostics)
      : flowsheet_(flowsheet), library_(library), catalogue_(catalogue), diagnostics_(diagnostics),
        maker_(library, flowsheet.liquors, diagnostics) {}

  std::optional<BuiltCase> build(BuiltCase built) {
    plan_ = plan_lots(flowsheet_, library_, diagnostics_);
    chemistry_ = compile();
    if (!diagnostics_.ok()) return std::nullopt;
    pressure_ = pressure_at(flowsheet_.altitude);
    built.site_pressure = pressure_;
    built.at_equilibrium = plan_.at_equilibrium;
    for (const PhaseRow& phase : chemistry_->phases) (phase.may_form ? built.may_form : built.watched).push_back(phase.name);
    make_context();
    if (!diagnostics_.ok()) return std::nullopt;
    make_feeds();
    built.steady = join(true);
    if (flowsheet_.history) built.timed = join(false);
    if (!diagnostics_.ok()) return std::nullopt;
    check_metals(*built.steady);
    built.metals = flowsheet_.metals;
    if (flowsheet_.history && !flowsheet_.history->from_steady) built.start = fill(*built.timed);
    if (!diagnostics_.ok()) return std::nullopt;
    return built;
  }

 private:
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
    ChemistryRequest request;
    request.components.assign(components.begin(), components.end());
    request.families = flowsheet_.chemistry.families;
    request.may_form = flowsheet_.chemistry.may_form;
    request.may_form_given = flowsheet_.chemistry.may_form_given;
    request.forms_slowly = flowsheet_.chemistry.forms_slowly;
    request.only = flowsheet_.chemistry.only;
    request.one_kg_water_per_litre = flowsheet_.chemistry.one_kg_water_per_litre;
    request.fixed_debye_huckel_a = flowsheet_.chemistry.debye_huckel_a;
    request.activity = catalogue_.activity.at(flowsheet_.chemistry.activity)();
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
      const auto feed = feeds.make(stream, temperature);
      if (!feed) continue;
      CircuitStream made;
      made.name = stream.name;
      made.feed = feed->flow;
      made.temperature = temperature;
      feed_streams_.push_back(made);
      dry_solids_ += feed->dry_solids;
      fresh_solids_.push_back(feed->dry_solids > 0);
      if (!feed->counted_as.empty()) reagents_.push_back({stream.name, feed->counted_as, feed->reagent});
    }
  }

  // Units in file order with expansions spelt out.
  std::vector<UnitSpec> members() const {
    std::vector<UnitSpec> all;
    for (const UnitSpec& unit : flowsheet_.units) {
      const auto expansion = catalogue_.expansions.find(unit.kind);
      if (expansion == catalogue_.expansions.end()) {
        all.push_back(unit);
        continue;
      }
      for (int k = 1; k <= unit.count; ++k) {
        UnitSpec member = unit;
        member.name = unit.name + "." + std::to_string(k);
        member.kind = expansion->second.unit;
        member.count = 1;
        if (k > 1) member.takes = {{unit.name + "." + std::to_string(k - 1) + ".pulp", unit.place}};
        const auto extra = unit.member_takes.find(k);
        if (extra != unit.member_takes.end()) member.takes.insert(member.takes.end(), extra->second.begin(), extra->second.end());
        member.member_takes.clear();
        all.push_back(member);
      }
    }
    return all;
  }

  std::shared_ptr<const Circuit> join(bool steady) {
    auto circuit = std::make_shared<Circuit>();
    circuit->title = flowsheet_.title;
    circuit->chemistry = chemistry_;
    circuit->context = context_;
    circuit->elements = elements_;
    circuit->streams = feed_streams_;
    circuit->reagents = reagents_;
    circuit->dry_solids = dry_solids_;
    const std::vector<UnitSpec> specs = members();
    for (const UnitSpec& spec : specs) add_unit(*circuit, spec, steady);
    if (!diagnostics_.ok()) return circuit;
    connect(*circuit, specs);
    name_leaving(*circuit);
    check_ends(*circuit, specs);
    if (!diagnostics_.ok()) return circuit;
    pass_temperatures(*circuit, specs);
    order(*circuit, steady, specs);
    fill_elements(*circuit);
    scales(*circuit);
    return circuit;
  }

  void add_unit(Circuit& circuit, const UnitSpec& spec, bool steady) {
    const UnitKind& kind = catalogue_.units.at(spec.kind);
    UnitSettings settings;
    settings.name = spec.name;
    settings.steady = steady;
    settings.temperature = spec.temperature.value_or(flowsheet_.air_temperature.value_or(298.15));
    for (const ParameterSpec& parameter : kind.parameters) {
      const auto typed = spec.parameters.find(parameter.name);
      if (typed != spec.parameters.end())
        settings.values[parameter.name] = convert(typed->second.quantity, parameter.unit);
      else if (parameter.otherwise)
        settings.values[parameter.name] = *parameter.otherwise;
    }
    if (settings.values.count("draw") && steady && !flowsheet_.history)
      diagnostics_.fault(Code::bad_data, spec.place, spec.name + ": in a steady run a surge keeps its volume and its draw is what enters; drop the draw, or give a history");
    for (const OutletSpec& outlet : spec.outlets) {
      OutletShare share{outlet.name, 0, 0, outlet.share.rest};
      if (!share.rest) {
        if (convertible(outlet.share.quantity.unit, "1")) share.share = convert(outlet.share.quantity, "1");
        else share.volume_flow = convert(outlet.share.quantity, "m3/s");
      }
      settings.outlets.push_back(share);
    }
    if (spec.gas) add_gas(spec, settings);
    CircuitUnit unit;
    unit.name = spec.name;
    unit.kind = spec.kind;
    unit.operation = kind.make(settings, *context_);
    unit.first_stream = static_cast<int>(circuit.streams.size());
    const UnitTraits& traits = unit.operation->traits();
    for (std::size_t o = 0; o < traits.outlets.size(); ++o) {
      CircuitStream stream;
      stream.name = spec.name + "." + traits.outlets[o];
      stream.source = static_cast<int>(circuit.units.size());
      stream.outlet = static_cast<int>(o);
      stream.temperature = settings.temperature;
      circuit.streams.push_back(stream);
    }
    circuit.units.push_back(unit);
  }

  // Dissolved oxygen against air: C* = y (P - p_w) k_H, Henry's law with the data folder's constant.
  void add_gas(const UnitSpec& spec, UnitSettings& settings) {
    for (const GasRow& gas : chemistry_->gases) {
      if (chemistry_->species[gas.species].name != "O2") continue;
      GasContact contact;
      contact.component = "O2";
      contact.species = gas.species;
      contact.component_index = chemistry_->find_component("O2");
      contact.transfer = spec.gas->transfer;
      const double dry = pressure_ - library_.water_vapour_pressure(settings.temperature);
      contact.at_equilibrium = 1000 * chemistry_->henry(gas, settings.temperature) * oxygen_in_air * dry;
      settings.gases.push_back(contact);
    }
  }

  int stream_index(const Circuit& circuit, const std::string& name, const Place& place) {
    std::vector<std::string> names;
    for (const CircuitStream& stream : circuit.streams) names.push_back(stream.name);
    const int direct = circuit.find_stream(name);
    if (direct >= 0) return direct;
    // A unit with one outlet by its own name; a train by its last member.
    std::string unit_name = name, outlet;
    for (const UnitSpec& spec : flowsheet_.units)
      if (catalogue_.expansions.count(spec.kind) && (name == spec.name || name.rfind(spec.name + ".", 0) == 0)) {
        const std::string rest = name.size() > spec.name.size() ? name.substr(spec.name.size()) : "";
        const std::string last = spec.name + "." + std::to_string(spec.count) + rest;
        const int found = circuit.find_stream(last);
        if (found >= 0) return found;
        unit_name = last;
      }
    const int unit = circuit.find_unit(unit_name);
    if (unit >= 0) {
      const auto& outlets = circuit.units[unit].operation->traits().outlets;
      if (outlets.size() == 1) return circuit.units[unit].first_stream;
      std::string list;
      for (const std::string& one : outlets) list += (list.empty() ? "" : ", ") + unit_name + "." + one;
      diagnostics_.fault(Code::unknown_name, place, unit_name + " has several outlets; name one: " + list);
      return -1;
    }
    const int owner = circuit.find_unit(name.substr(0, name.rfind('.')));
    if (owner >= 0) {
      std::string list;
      for (const std::string& one : circuit.units[owner].operation->traits().outlets) list += (list.empty() ? "" : ", ") + one;
      diagnostics_.fault(Code::unknown_name, place, "'" + name + "' is no outlet: " + circuit.units[owner].name + " gives " + list);
      return -1;
    }
    diagnostics_.fault(Code::unknown_name, place, "'" + name + "' is neither a stream nor an outlet of a unit" + did_you_mean(name, names));
    return -1;
  }

  void connect(Circuit& circuit, const std::vector<UnitSpec>& specs) {
    for (std::size_t u = 0; u < specs.size(); ++u)
      for (const auto& [name, place] : specs[u].takes) {
        const int s = stream_index(circuit, name, place);
        if (s < 0) continue;
        CircuitStream& stream = circuit.streams[s];
        if (stream.taker >= 0) {
          diagnostics_.fault(Code::duplicate, place, stream.name + " is taken twice, by " + circuit.units[stream.taker].name + " and by " +
                                                         circuit.units[u].name + "; put a splitter between");
          continue;
        }
        stream.taker = static_cast<int>(u);
        circuit.units[u].takes.push_back(s);
      }
    // The sum of inlets does not depend on the order in the file.
    for (CircuitUnit& unit : circuit.units) std::sort(unit.takes.begin(), unit.takes.end());
  }

  void name_leaving(Circuit& circuit) {
    for (const LeavesSpec& leaves : flowsheet_.leaves) {
      const int s = stream_index(circuit, leaves.stream, leaves.place);
      if (s < 0) continue;
      CircuitStream& stream = circuit.streams[s];
      if (stream.taker >= 0)
        diagnostics_.fault(Code::duplicate, leaves.place, stream.name + " is named as leaving but " + circuit.units[stream.taker].name + " takes it");
      if (!stream.leaves_as.empty())
        diagnostics_.fault(Code::duplicate, leaves.place, stream.name + " leaves twice, as " + stream.leaves_as + " and as " + leaves.name);
      stream.leaves_as = leaves.name;
    }
    // pregnant_liquor names a stream, or a name under leaves.
    for (std::size_t s = 0; s < circuit.streams.size(); ++s)
      if (!flowsheet_.pregnant_liquor.empty() && circuit.streams[s].leaves_as == flowsheet_.pregnant_liquor) circuit.pregnant_liquor = static_cast<int>(s);
    if (circuit.pregnant_liquor < 0 && !flowsheet_.pregnant_liquor.empty())
      circuit.pregnant_liquor = stream_index(circuit, flowsheet_.pregnant_liquor, flowsheet_.pregnant_place);
  }

  void check_ends(const Circuit& circuit, const std::vector<UnitSpec>& specs) {
    for (const CircuitStream& stream : circuit.streams) {
      if (stream.taker >= 0 || !stream.leaves_as.empty()) continue;
      Place place = flowsheet_.place;
      if (stream.source >= 0) {
        place = specs[stream.source].place;
      } else {
        for (const StreamSpec& spec : flowsheet_.streams)
          if (spec.name == stream.name) place = spec.place;
      }
      diagnostics_.fault(Code::not_connected, place,
                         stream.name + " goes nowhere: let a unit take it, or name it under leaves");
    }
    for (const StreamSpec& spec : flowsheet_.streams) {
      if (!spec.gas) continue;
      const bool used = std::any_of(specs.begin(), specs.end(), [&](const UnitSpec& unit) { return unit.gas && unit.gas->takes == spec.name; });
      if (!used) diagnostics_.fault(Code::not_connected, spec.place, spec.name + " goes nowhere: no unit takes it as gas");
    }
  }

  // A unit that only passes on, without a temperature of its own, has that of its inlets; where those differ it is asked.
  void pass_temperatures(Circuit& circuit, const std::vector<UnitSpec>& specs) {
    std::vector<bool> known(circuit.streams.size());
    for (std::size_t s = 0; s < circuit.streams.size(); ++s) {
      const int source = circuit.streams[s].source;
      known[s] = source < 0 ? circuit.streams[s].feed[context_->layout.water()] > 0
                            : specs[source].temperature || circuit.units[source].operation->traits().hold_up;
    }
    for (std::size_t turn = 0; turn < specs.size(); ++turn)
      for (std::size_t u = 0; u < specs.size(); ++u) {
        if (specs[u].temperature || circuit.units[u].operation->traits().hold_up) continue;
        double found = 0;
        for (int s : circuit.units[u].takes) {
          if (!known[s]) continue;
          const double t = circuit.streams[s].temperature;
          if (found > 0 && std::abs(t - found) > 0.01 && turn + 1 == specs.size())
            diagnostics_.fault(Code::missing_key, specs[u].place,
                               fmt::format("streams of {:.4g} and {:.4g} degC meet in {}: give it a temperature", found - zero_celsius, t - zero_celsius, specs[u].name));
          found = t;
        }
        if (!(found > 0)) continue;
        circuit.units[u].operation->set_temperature(found);
        for (std::size_t o = 0; o < circuit.units[u].operation->traits().outlets.size(); ++o) {
          circuit.streams[circuit.units[u].first_stream + o].temperature = found;
          known[circuit.units[u].first_stream + o] = true;
        }
      }
  }

  // Hold-up units by distance from the feeds, then those that pass on so that each has its inlets first.
  void order(Circuit& circuit, bool steady, const std::vector<UnitSpec>& specs) {
    for (;;) {
      std::vector<int> state(circuit.units.size(), 0), passing, path;
      int torn = -1;
      std::function<void(int)> visit = [&](int u) {
        if (torn >= 0 || circuit.units[u].operation->traits().hold_up || state[u] == 2) return;
        if (state[u] == 1) {
          torn = u;
          return;
        }
        state[u] = 1;
        path.push_back(u);
        for (int s : circuit.units[u].takes)
          if (circuit.streams[s].source >= 0) visit(circuit.streams[s].source);
        if (torn >= 0) return;
        path.pop_back();
        state[u] = 2;
        passing.push_back(u);
      };
      for (std::size_t u = 0; u < circuit.units.size(); ++u) visit(static_cast<int>(u));
      if (torn < 0) {
        circuit.passing = passing;
        break;
      }
      std::string loop;
      for (auto at = std::find(path.begin(), path.end(), torn); at != path.end(); ++at) loop = circuit.units[*at].name + (loop.empty() ? "" : " > ") + loop;
      if (!steady) {
        diagnostics_.fault(Code::no_hold_up, specs[torn].place,
                           "the loop " + loop + " has no vessel with hold-up: through time put a tank or a surge into it");
        return;
      }
      tear(circuit, torn);
    }
    place_holding(circuit);
  }

  // The first inlet of `unit` that comes from a unit without hold-up goes through a torn stream.
  void tear(Circuit& circuit, int unit) {
    for (int& s : circuit.units[unit].takes) {
      const int source = circuit.streams[s].source;
      if (source < 0 || circuit.units[source].operation->traits().hold_up) continue;
      CircuitUnit made;
      made.name = circuit.streams[s].name + " (torn)";
      made.kind = "torn stream";
      made.operation = std::make_shared<TornStream>(context_->layout.size());
      made.torn = true;
      made.takes = {s};
      made.first_stream = static_cast<int>(circuit.streams.size());
      circuit.streams[s].taker = static_cast<int>(circuit.units.size());
      CircuitStream stream;
      stream.name = circuit.streams[s].name + " (torn)";
      stream.source = static_cast<int>(circuit.units.size());
      stream.taker = unit;
      stream.temperature = circuit.streams[s].temperature;
      s = static_cast<int>(circuit.streams.size());
      circuit.streams.push_back(stream);
      circuit.units.push_back(made);
      return;
    }
  }

  void place_holding(Circuit& circuit) {
    // Breadth-first from the feeds, so that a sweep meets each vessel after what feeds it.
    std::vector<int> distance(circuit.units.size(), 1 << 20), queue;
    for (const CircuitStream& stream : circuit.streams)
      if (stream.source < 0 && stream.taker >= 0 && distance[stream.taker] > 0) {
        distance[stream.taker] = 0;
        queue.push_back(stream.taker);
      }
    for (std::size_t at = 0; at < queue.size(); ++at)
      for (const CircuitStream& stream : circuit.streams)
        if (stream.source == queue[at] && stream.taker >= 0 && distance[stream.taker] == 1 << 20) {
          distance[stream.taker] = distance[queue[at]] + 1;
          queue.push_back(stream.taker);
        }
    for (std::size_t u = 0; u < circuit.units.size(); ++u)
      if (circuit.units[u].operation->traits().hold_up) circuit.holding.push_back(static_cast<int>(u));
    std::stable_sort(circuit.holding.begin(), circuit.holding.end(), [&](int a, int b) { return distance[a] < distance[b]; });
    for (int u : circuit.holding) {
      CircuitUnit& unit = circuit.units[u];
      unit.first_state = circuit.states;
      unit.states = context_->layout.size() + static_cast<int>(unit.operation->traits().state_names.size());
      circuit.states += unit.states;
      unit.first_ledger = circuit.ledgers;
      for (const std::string& component : unit.operation->traits().ledger) {
        circuit.ledger_component.push_back(chemistry_->find_component(component));
        circuit.ledger_unit.push_back(u);
        ++circuit.ledgers;
      }
    }
  }

  void fill_elements(Circuit& circuit) {
    for (const std::string& element : elements_) circuit.element_mass.push_back(library_.atomic_weights.at(element));
    const int count = chemistry_->component_count() + 1;
    circuit.component_elements.assign(count, std::vector<double>(elements_.size(), 0.0));
    for (int j = 0; j < count; ++j)
      for (std::size_t e = 0; e < chemistry_->elements.size(); ++e) circuit.component_elements[j][e] = chemistry_->atoms[j][e];
    circuit.fed_solids.assign(elements_.size(), 0.0);
    for (std::size_t s = 0; s < feed_streams_.size(); ++s) {
      if (!fresh_solids_[s]) continue;
      for (std::size_t e = 0; e < elements_.size(); ++e)
        circuit.fed_solids[e] += circuit.element_in_lots(static_cast<int>(e), feed_streams_[s].feed);
    }
    // Minerals at equilibrium came with the solids too, though they stand in the liquor's totals.
    for (const StreamSpec& stream : flowsheet_.streams) add_equilibrium_minerals(circuit, stream);
  }

  void add_equilibrium_minerals(Circuit& circuit, const StreamSpec& stream) {
    if (stream.solids.empty()) return;
    for (const SolidsSpec& solids : flowsheet_.solids) {
      if (solids.name != stream.solids) continue;
      const double wet = stream.solids_fraction ? 1 - *stream.solids_fraction : solids.moisture;
      const double rate = convert(stream.rate.quantity, "kg/s"), dry = stream.rate_dry ? rate : rate * (1 - wet);
      double rest = 1;
      for (const SolidPhaseSpec& phase : solids.phases)
        if (!phase.share.rest) rest -= convert(phase.share.quantity, "1");
      for (const SolidPhaseSpec& phase : solids.phases) {
        if (std::find(plan_.at_equilibrium.begin(), plan_.at_equilibrium.end(), phase.mineral) == plan_.at_equilibrium.end()) continue;
        const Formula& formula = library_.find_solid(phase.mineral)->formula;
        const double amount = dry * (phase.share.rest ? rest : convert(phase.share.quantity, "1")) / library_.molar_mass(formula);
        for (const auto& [element, count] : formula.atoms) {
          const auto at = std::find(elements_.begin(), elements_.end(), element);
          if (at != elements_.end()) circuit.fed_solids[at - elements_.begin()] += amount * count;
        }
      }
    }
  }

  void scales(Circuit& circuit) {
    const PulpLayout& layout = context_->layout;
    std::vector<double> fed(layout.size(), 0.0);
    double volume = 0;
    for (const CircuitStream& stream : feed_streams_) {
      for (int k = 0; k < layout.size(); ++k) fed[k] += std::abs(stream.feed[k]);
      if (stream.feed[layout.water()] > 0)
        volume += chemistry_->liquor_volume.volume(stream.temperature, std::span<const double>(stream.feed).first(layout.components + 1), {});
    }
    for (int k = 0; k < layout.lots; ++k) volume += fed[layout.lot(k)] * context_->lots[k].molar_volume;
    circuit.flow_scale = std::max(volume, 1e-12);
    for (int j = 0; j <= layout.components; ++j) {
      double amount = fed[j];
      for (int k = 0; k < layout.lots; ++k) amount += std::abs(context_->lots[k].products[j]) * fed[layout.lot(k)];
      const double least = j == chemistry_->hydrogen ? 1e-2 : least_scale * 55500;
      circuit.component_scale.push_back(std::max(amount / circuit.flow_scale, j == layout.water() ? 1.0 : least * 1e-3));
    }
    for (int k = 0; k < layout.lots; ++k) circuit.lot_scale.push_back(std::max(fed[layout.lot(k)] / circuit.flow_scale, 1e-9));
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
