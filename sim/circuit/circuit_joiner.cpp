#include "sim/circuit/circuit_joiner.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"
#include "sim/circuit/calculation_order.hpp"

namespace leat {
namespace {

constexpr double oxygen_in_air = 0.209476;  // dry air, by volume; U.S. Standard Atmosphere 1976, from memory [1]
constexpr double least_scale = 1e-6;        // share of the water's content a scale may not go under

class Joiner {
 public:
  Joiner(const CircuitParts& parts, Diagnostics& diagnostics) : parts_(parts), diagnostics_(diagnostics) {}

  std::shared_ptr<const Circuit> join(bool steady) {
    auto circuit = std::make_shared<Circuit>();
    circuit->title = parts_.flowsheet->title;
    circuit->chemistry = parts_.chemistry;
    circuit->context = parts_.context;
    circuit->elements = parts_.elements;
    circuit->streams = parts_.feed_streams;
    circuit->reagents = parts_.reagents;
    circuit->dry_solids = parts_.dry_solids;
    const std::vector<UnitSpec> specs = members();
    for (const UnitSpec& spec : specs) add_unit(*circuit, spec, steady);
    const std::size_t before = diagnostics_.faults().size();
    connect(*circuit, specs);
    name_leaving(*circuit);
    // A name that was not found leaves its stream hanging: a consequence, not told.
    if (diagnostics_.faults().size() == before) check_ends(*circuit, specs);
    if (diagnostics_.faults().size() > before) return circuit;
    pass_temperatures(*circuit, specs);
    order_circuit(*circuit, steady, specs, diagnostics_);
    if (!diagnostics_.ok()) return circuit;
    fill_elements(*circuit);
    scales(*circuit);
    return circuit;
  }


 private:
  // Units in file order with expansions spelt out.
  std::vector<UnitSpec> members() const {
    std::vector<UnitSpec> all;
    for (const UnitSpec& unit : parts_.flowsheet->units) {
      const auto expansion = parts_.catalogue->expansions.find(unit.kind);
      if (expansion == parts_.catalogue->expansions.end()) {
        all.push_back(unit);
        continue;
      }
      for (int k = 1; k <= unit.count; ++k) {
        UnitSpec member = unit;
        member.name = unit.name + "." + std::to_string(k);
        member.kind = expansion->second.unit;
        member.count = 1;
        if (k > 1) member.takes = {{unit.name + "." + std::to_string(k - 1), unit.place}};
        const auto extra = unit.member_takes.find(k);
        if (extra != unit.member_takes.end()) member.takes.insert(member.takes.end(), extra->second.begin(), extra->second.end());
        member.member_takes.clear();
        all.push_back(member);
      }
    }
    return all;
  }

  void add_unit(Circuit& circuit, const UnitSpec& spec, bool steady) {
    const UnitKind& kind = parts_.catalogue->units.at(spec.kind);
    UnitSettings settings;
    settings.name = spec.name;
    settings.steady = steady;
    settings.temperature = spec.temperature.value_or(parts_.flowsheet->air_temperature.value_or(298.15));
    for (const ParameterSpec& parameter : kind.parameters) {
      const auto typed = spec.parameters.find(parameter.name);
      if (typed != spec.parameters.end())
        settings.values[parameter.name] = convert(typed->second.quantity, parameter.unit);
      else if (parameter.otherwise)
        settings.values[parameter.name] = *parameter.otherwise;
      else if (parameter.required && !diagnostics_.ok())  // told as missing: stands in so that the piping is looked at too
        settings.values[parameter.name] = std::clamp(1.0, parameter.least, parameter.most);
    }
    if (settings.values.count("draw") && steady && !parts_.flowsheet->history)
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
    unit.operation = kind.make(settings, *parts_.context);
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
    for (const GasRow& gas : parts_.chemistry->gases) {
      if (parts_.chemistry->species[gas.species].name != "O2") continue;
      GasContact contact;
      contact.component = "O2";
      contact.species = gas.species;
      contact.component_index = parts_.chemistry->find_component("O2");
      contact.transfer = spec.gas->transfer;
      const double dry = parts_.pressure - parts_.library->water_vapour_pressure(settings.temperature);
      contact.at_equilibrium = 1000 * parts_.chemistry->henry(gas, settings.temperature) * oxygen_in_air * dry;
      settings.gases.push_back(contact);
    }
  }

  int stream_index(const Circuit& circuit, const std::string& name, const Place& place) {
    std::vector<std::string> names;
    for (const CircuitStream& stream : circuit.streams) names.push_back(stream.name);
    for (const LeavesSpec& one : parts_.flowsheet->leaves) names.push_back(one.name);
    const int direct = circuit.find_stream(name);
    if (direct >= 0) return direct;
    // A unit with one outlet by its own name; a train by its last member.
    std::string unit_name = name, outlet;
    for (const UnitSpec& spec : parts_.flowsheet->units)
      if (circuit.find_unit(name) < 0 && parts_.catalogue->expansions.count(spec.kind) && (name == spec.name || name.rfind(spec.name + ".", 0) == 0)) {
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
    for (const LeavesSpec& leaves : parts_.flowsheet->leaves) {
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
      if (!parts_.flowsheet->pregnant_liquor.empty() && circuit.streams[s].leaves_as == parts_.flowsheet->pregnant_liquor) circuit.pregnant_liquor = static_cast<int>(s);
    const std::string& pregnant = parts_.flowsheet->pregnant_liquor;
    const bool under_leaves = std::any_of(parts_.flowsheet->leaves.begin(), parts_.flowsheet->leaves.end(),
                                          [&](const LeavesSpec& one) { return one.name == pregnant; });  // its own fault is told there
    if (circuit.pregnant_liquor < 0 && !pregnant.empty() && !under_leaves)
      circuit.pregnant_liquor = stream_index(circuit, pregnant, parts_.flowsheet->pregnant_place);
    if (circuit.pregnant_liquor >= 0 && circuit.streams[circuit.pregnant_liquor].source < 0)
      diagnostics_.fault(Code::bad_data, parts_.flowsheet->pregnant_place, "pregnant_liquor is " + pregnant + ", which is a feed; name an outlet");
  }

  void check_ends(const Circuit& circuit, const std::vector<UnitSpec>& specs) {
    for (const CircuitStream& stream : circuit.streams) {
      if (stream.taker >= 0 || !stream.leaves_as.empty()) continue;
      Place place = parts_.flowsheet->place;
      if (stream.source >= 0) {
        place = specs[stream.source].place;
      } else {
        for (const StreamSpec& spec : parts_.flowsheet->streams)
          if (spec.name == stream.name) place = spec.place;
      }
      diagnostics_.fault(Code::not_connected, place,
                         stream.name + " goes nowhere: let a unit take it, or name it under leaves");
    }
    for (const StreamSpec& spec : parts_.flowsheet->streams) {
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
      known[s] = source < 0 ? circuit.streams[s].feed[parts_.context->layout.water()] > 0
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

  void fill_elements(Circuit& circuit) {
    for (const std::string& element : parts_.elements) circuit.element_mass.push_back(parts_.library->atomic_weights.at(element));
    const int count = parts_.chemistry->component_count() + 1;
    circuit.component_elements.assign(count, std::vector<double>(parts_.elements.size(), 0.0));
    for (int j = 0; j < count; ++j)
      for (std::size_t e = 0; e < parts_.chemistry->elements.size(); ++e) circuit.component_elements[j][e] = parts_.chemistry->atoms[j][e];
    circuit.fed_solids.assign(parts_.elements.size(), 0.0);
    for (std::size_t s = 0; s < parts_.feed_streams.size(); ++s) {
      if (!parts_.fresh_solids[s]) continue;
      for (std::size_t e = 0; e < parts_.elements.size(); ++e)
        circuit.fed_solids[e] += circuit.element_in_lots(static_cast<int>(e), parts_.feed_streams[s].feed);
    }
    // Minerals at equilibrium came with the solids too, though they stand in the liquor's totals.
    for (const StreamSpec& stream : parts_.flowsheet->streams) add_equilibrium_minerals(circuit, stream);
  }

  void add_equilibrium_minerals(Circuit& circuit, const StreamSpec& stream) {
    if (stream.solids.empty()) return;
    for (const SolidsSpec& solids : parts_.flowsheet->solids) {
      if (solids.name != stream.solids) continue;
      const double wet = stream.solids_fraction ? 1 - *stream.solids_fraction : solids.moisture;
      const double rate = convert(stream.rate.quantity, "kg/s"), dry = stream.rate_dry ? rate : rate * (1 - wet);
      double rest = 1;
      for (const SolidPhaseSpec& phase : solids.phases)
        if (!phase.share.rest) rest -= convert(phase.share.quantity, "1");
      for (const SolidPhaseSpec& phase : solids.phases) {
        if (std::find(parts_.plan->at_equilibrium.begin(), parts_.plan->at_equilibrium.end(), phase.mineral) == parts_.plan->at_equilibrium.end()) continue;
        const Formula& formula = parts_.library->find_solid(phase.mineral)->formula;
        const double amount = dry * (phase.share.rest ? rest : convert(phase.share.quantity, "1")) / parts_.library->molar_mass(formula);
        for (const auto& [element, count] : formula.atoms) {
          const auto at = std::find(parts_.elements.begin(), parts_.elements.end(), element);
          if (at != parts_.elements.end()) circuit.fed_solids[at - parts_.elements.begin()] += amount * count;
        }
      }
    }
  }

  void scales(Circuit& circuit) {
    const PulpLayout& layout = parts_.context->layout;
    std::vector<double> fed(layout.size(), 0.0);
    double volume = 0;
    for (const CircuitStream& stream : parts_.feed_streams) {
      for (int k = 0; k < layout.size(); ++k) fed[k] += std::abs(stream.feed[k]);
      if (stream.feed[layout.water()] > 0)
        volume += parts_.chemistry->liquor_volume.volume(stream.temperature, std::span<const double>(stream.feed).first(layout.components + 1), {});
    }
    for (int k = 0; k < layout.lots; ++k) volume += fed[layout.lot(k)] * parts_.context->lots[k].molar_volume;
    circuit.flow_scale = std::max(volume, 1e-12);
    for (int j = 0; j <= layout.components; ++j) {
      double amount = fed[j];
      for (int k = 0; k < layout.lots; ++k) amount += std::abs(parts_.context->lots[k].products[j]) * fed[layout.lot(k)];
      const double least = j == parts_.chemistry->hydrogen ? 1e-2 : least_scale * 55500;
      circuit.component_scale.push_back(std::max(amount / circuit.flow_scale, j == layout.water() ? 1.0 : least * 1e-3));
    }
    for (int k = 0; k < layout.lots; ++k) circuit.lot_scale.push_back(std::max(fed[layout.lot(k)] / circuit.flow_scale, 1e-9));
  }

  const CircuitParts& parts_;
  Diagnostics& diagnostics_;
};

}  // namespace

std::shared_ptr<const Circuit> join_circuit(const CircuitParts& parts, bool steady, Diagnostics& diagnostics) {
  return Joiner(parts, diagnostics).join(steady);
}

}  // namespace leat
