#include "sim/results/run_layout.hpp"

#include <algorithm>
#include <cmath>
#include <functional>

#include "sim/results/layout_parts.hpp"

namespace leat {
namespace {

using Rows = std::vector<const Snapshot*>;

// Collects variables over the stored times and, where there is a steady state, a twin of each at rest, steady_NAME.
class TimeTable {
 public:
  TimeTable(ResultSet& set, const Rows& rows, const Snapshot* steady) : set_(set), rows_(rows), steady_(steady) {}

  void per_time(const char* name, const char* meaning, const char* units, const std::function<double(const Snapshot&)>& value) {
    list(name, meaning, units, {}, [&](const Snapshot& row) { return std::vector<double>{value(row)}; });
  }
  void list(const char* name, const char* meaning, const char* units, std::vector<std::string> axes,
            const std::function<std::vector<double>(const Snapshot&)>& values) {
    if (steady_) twins_.push_back({std::string("steady_") + name, std::string(meaning) + ", at steady state", units, axes, values(*steady_)});
    list_history(name, meaning, units, std::move(axes), values);
  }
  // The same for what only a history has: integrals and holdings.
  void list_history(const char* name, const char* meaning, const char* units, std::vector<std::string> axes,
                    const std::function<std::vector<double>(const Snapshot&)>& values) {
    axes.insert(axes.begin(), "time");
    Variable variable{name, meaning, units, axes, {}};
    for (const Snapshot* row : rows_) {
      const std::vector<double> one = values(*row);
      variable.values.insert(variable.values.end(), one.begin(), one.end());
    }
    set_.variables.push_back(std::move(variable));
  }
  void add_twins() { set_.variables.insert(set_.variables.end(), twins_.begin(), twins_.end()); }
  void unit(const char* name, const char* meaning, const char* units, const std::function<double(const UnitSnapshot&)>& value) {
    list(name, meaning, units, {"unit"}, [&](const Snapshot& row) {
      std::vector<double> out;
      for (const UnitSnapshot& one : row.units) out.push_back(value(one));
      return out;
    });
  }
  void unit_list(const char* name, const char* meaning, const char* units, std::vector<std::string> axes,
                 const std::function<const std::vector<double>&(const UnitSnapshot&)>& value) {
    axes.insert(axes.begin(), "unit");
    list(name, meaning, units, axes, [&](const Snapshot& row) {
      std::vector<double> out;
      for (const UnitSnapshot& one : row.units) out.insert(out.end(), value(one).begin(), value(one).end());
      return out;
    });
  }
  void stream(const char* name, const char* meaning, const char* units, const std::function<double(const StreamSnapshot&)>& value) {
    list(name, meaning, units, {"stream"}, [&](const Snapshot& row) {
      std::vector<double> out;
      for (const StreamSnapshot& one : row.streams) out.push_back(value(one));
      return out;
    });
  }
  void stream_list(const char* name, const char* meaning, const char* units, const char* axis, std::size_t begin, std::size_t count,
                   const std::function<const std::vector<double>&(const StreamSnapshot&)>& value) {
    list(name, meaning, units, {"stream", axis}, [&](const Snapshot& row) {
      std::vector<double> out;
      for (const StreamSnapshot& one : row.streams)
        out.insert(out.end(), value(one).begin() + begin, value(one).begin() + begin + count);
      return out;
    });
  }

 private:
  ResultSet& set_;
  const Rows& rows_;
  const Snapshot* steady_;  // null where none was found
  std::vector<Variable> twins_;
};

void add_axes(ResultSet& set, const RunResult& result, const Rows& rows) {
  const Circuit& circuit = *result.circuit;
  Axis time{"time", "time since the start", "h", {}, {}, !result.history.empty()};
  for (const Snapshot* row : rows) time.values.push_back(row->time / 3600);
  Axis unit{"unit", "vessel", "", {}, {}, false}, stream{"stream", "stream", "", {}, {}, false};
  for (int u : result.vessels) unit.labels.push_back(circuit.units[u].name);
  for (const CircuitStream& one : circuit.streams) stream.labels.push_back(one.name);
  Axis element{"element", "metal fed with the solids", "", {}, {}, false};
  for (int e : result.recovered) element.labels.push_back(circuit.elements[e]);
  Axis operation{"operation", "unit of the circuit, those without hold-up too", "", {}, {}, false};
  TextTable kind{"operation_kind", "kind of a unit", "operation", {}};
  for (const CircuitUnit& one : circuit.units)
    if (!one.torn) {
      operation.labels.push_back(one.name);
      kind.values.push_back(one.kind);
    }
  Axis lot{"lot", "fed mineral, or a part of one", "", {}, {}, false};
  for (const Lot& one : circuit.context->lots) lot.labels.push_back(one.name);
  set.axes.insert(set.axes.end(), {time, unit, operation, stream, element, lot});
  set.texts.push_back(kind);
}

// Where each stream comes from and goes to, and what is fed: enough to draw the circuit and to weigh its metals.
void add_circuit(ResultSet& set, const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  TextTable from{"stream_from", "unit a stream comes out of; empty where it is fed", "stream", {}};
  TextTable to{"stream_to", "unit that takes a stream; empty where it leaves", "stream", {}};
  TextTable leaves{"stream_leaves_as", "name under which a stream leaves", "stream", {}};
  const auto name = [&](int unit) { return unit >= 0 && !circuit.units[unit].torn ? circuit.units[unit].name : std::string(); };
  for (const CircuitStream& stream : circuit.streams) {
    from.values.push_back(name(stream.source));
    to.values.push_back(name(stream.taker));
    leaves.values.push_back(stream.leaves_as);
  }
  set.texts.insert(set.texts.end(), {from, to, leaves});
  Variable mass{"element_mass", "molar mass", "kg mol-1", {"element"}, {}}, fed{"fed", "metal fed with the solids", "kg s-1", {"element"}, {}};
  for (int e : result.recovered) {
    mass.values.push_back(circuit.element_mass[e]);
    fed.values.push_back(circuit.fed_solids[e] * circuit.element_mass[e]);
  }
  set.variables.insert(set.variables.end(), {mass, fed});
  set.variables.push_back({"dry_solids", "dry solids fed", "kg s-1", {}, {circuit.dry_solids}});
}

void add_recoveries(TimeTable& table) {
  table.list("recovery_by_family", "recovery into the pregnant liquor by family of complexes, rates now", "1", {"element", "family"},
             [](const Snapshot& s) { return s.recovery_by_family; });
  table.list("recovery", "metal in the pregnant liquor over metal fed, rates now", "1", {"element"}, [](const Snapshot& s) { return s.recovery_now; });
  table.list("extraction", "1 - metal leaving undissolved over metal fed, rates now", "1", {"element"}, [](const Snapshot& s) { return s.extraction_now; });
  table.list("formed_leaving", "metal leaving as solids formed in the circuit over metal fed, rates now", "1", {"element"}, [](const Snapshot& s) { return s.formed_leaving_now; });
  table.list_history("recovery_by_family_to_date", "recovery by family, integrals since the start", "1", {"element", "family"},
             [](const Snapshot& s) { return s.recovery_by_family_to_date; });
  table.list_history("recovery_to_date", "recovery, integrals since the start", "1", {"element"}, [](const Snapshot& s) { return s.recovery_to_date; });
  table.list_history("extraction_to_date", "extraction, integrals since the start", "1", {"element"}, [](const Snapshot& s) { return s.extraction_to_date; });
  table.list_history("held_in_vessels", "metal dissolved or formed in the vessels", "mol", {"element"}, [](const Snapshot& s) { return s.held_in_vessels; });
}

void add_units(TimeTable& table) {
  table.unit("ph", "-log10 of the activity of H+", "1", [](const UnitSnapshot& u) { return u.ph; });
  table.unit("ionic_strength", "ionic strength", "mol kg-1", [](const UnitSnapshot& u) { return u.ionic_strength; });
  table.unit("water_activity", "activity of water", "1", [](const UnitSnapshot& u) { return u.water_activity; });
  table.unit("temperature", "temperature", "K", [](const UnitSnapshot& u) { return u.temperature; });
  table.unit("liquor_density", "density of the liquor", "kg m-3", [](const UnitSnapshot& u) { return u.liquor_density; });
  table.unit("pulp_volume", "volume of pulp", "m3", [](const UnitSnapshot& u) { return u.pulp_volume; });
  table.unit("outlet_flow", "pulp flow at the outlet", "m3 s-1", [](const UnitSnapshot& u) { return u.outlet_flow; });
  table.unit("solids_fraction", "mass of solids per mass of pulp", "1", [](const UnitSnapshot& u) { return u.solids_fraction; });
  table.unit_list("molality", "molality of a species", "mol kg-1", {"species"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.molality; });
  table.unit_list("formed", "solid formed", "mol", {"mineral"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.formed; });
  table.unit_list("saturation_index", "log10 of ion product over constant", "1", {"mineral"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.saturation_index; });
  table.unit_list("retained", "fed mineral not dissolved", "mol", {"lot"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.lots; });
  table.unit_list("dissolution_rate", "rate of dissolution", "mol s-1", {"lot"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.dissolving; });
  table.unit_list("clock_speed", "first-order speed of a lot", "s-1", {"lot"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.clock_speed; });
  table.unit_list("family_in_unit", "dissolved metal by family", "mol m-3", {"element", "family"}, [](const UnitSnapshot& u) -> const std::vector<double>& { return u.family; });
}

// One figure a stream and reported metal, weighed [kg/s] from amounts [mol/s].
std::vector<double> metals(const RunResult& result, const Snapshot& snapshot, const std::function<double(const StreamSnapshot&, int element)>& amount) {
  std::vector<double> out;
  for (const StreamSnapshot& one : snapshot.streams)
    for (int e : result.recovered) out.push_back(amount(one, e) * result.circuit->element_mass[e]);
  return out;
}

void add_streams(TimeTable& table, const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  const PulpLayout& layout = result.circuit->context->layout;
  table.stream_list("stream_flow", "component in liquor and formed solids", "mol s-1", "component", 0, layout.components + 1, [](const StreamSnapshot& s) -> const std::vector<double>& { return s.flow; });
  table.stream_list("stream_dissolved", "component in the liquor", "mol s-1", "component", 0, layout.components + 1, [](const StreamSnapshot& s) -> const std::vector<double>& { return s.dissolved; });
  table.stream_list("stream_lots", "fed minerals carried", "mol s-1", "lot", layout.components + 1, layout.lots, [](const StreamSnapshot& s) -> const std::vector<double>& { return s.flow; });
  table.stream_list("stream_formed", "formed solids carried", "mol s-1", "mineral", 0, result.circuit->chemistry->phases.size(), [](const StreamSnapshot& s) -> const std::vector<double>& { return s.formed; });
  table.list("stream_metal_dissolved", "metal dissolved in the liquor", "kg s-1", {"stream", "element"}, [&](const Snapshot& s) {
    return metals(result, s, [&](const StreamSnapshot& one, int e) {
      double amount = 0;
      for (std::size_t j = 0; j < one.dissolved.size(); ++j) amount += circuit.component_elements[j][e] * one.dissolved[j];
      return std::max(0.0, amount);  // noise of a metal that is not there is no metal
    });
  });
  table.list("stream_metal_undissolved", "metal in fed minerals", "kg s-1", {"stream", "element"}, [&](const Snapshot& s) {
    return metals(result, s, [&](const StreamSnapshot& one, int e) { return circuit.element_in_lots(e, one.flow); });
  });
  table.list("stream_metal_formed", "metal in formed solids", "kg s-1", {"stream", "element"}, [&](const Snapshot& s) {
    return metals(result, s, [&](const StreamSnapshot& one, int e) {
      double amount = 0;
      for (std::size_t p = 0; p < one.formed.size(); ++p)
        for (const Share& share : circuit.chemistry->phases[p].shares) amount += share.coefficient * circuit.component_elements[share.component][e] * one.formed[p];
      return amount;
    });
  });
  table.list("pregnant_liquor_molality", "molality of a species in the pregnant liquor", "mol kg-1", {"species"}, [&](const Snapshot& s) {
    std::vector<double> molality = s.streams[circuit.pregnant_liquor].molality;
    molality.resize(circuit.chemistry->species.size(), std::nan(""));  // nothing flows: none
    return molality;
  });
  table.stream("stream_ionic_strength", "ionic strength; missing where no liquor flows", "mol kg-1",
               [](const StreamSnapshot& s) { return s.molality.empty() ? std::nan("") : s.ionic_strength; });
  table.stream("stream_ph", "-log10 of the activity of H+", "1", [](const StreamSnapshot& s) { return s.ph; });
  table.stream("stream_liquor_flow", "volume flow of liquor", "m3 s-1", [](const StreamSnapshot& s) { return s.liquor_volume; });
  table.stream("stream_pulp_flow", "volume flow of pulp", "m3 s-1", [](const StreamSnapshot& s) { return s.pulp_volume; });
  table.stream("stream_solids_flow", "mass flow of solids", "kg s-1", [](const StreamSnapshot& s) { return s.solids; });
  table.stream("stream_mass_flow", "mass flow", "kg s-1", [](const StreamSnapshot& s) { return s.mass; });
}

// What is fed as a reagent and what dissolves from air, beside the streams and vessels it concerns.
void add_reagents(ResultSet& set, TimeTable& table, const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  Variable rate{"reagent_rate", "reagent fed by this stream, counted as reagent_counted_as", "kg s-1", {"stream"}, {}};
  Variable use{"reagent_consumption", "reagent fed per mass of dry solids fed", "kg kg-1", {"stream"}, {}};
  TextTable counted{"reagent_counted_as", "compound a reagent is counted as", "stream", {}};
  for (const CircuitStream& stream : circuit.streams) {
    const auto found = std::find_if(circuit.reagents.begin(), circuit.reagents.end(), [&](const ReagentUse& one) { return one.stream == stream.name; });
    const bool is = found != circuit.reagents.end();
    rate.values.push_back(is ? found->rate : std::nan(""));
    use.values.push_back(is && circuit.dry_solids > 0 ? found->rate / circuit.dry_solids : std::nan(""));
    counted.values.push_back(is ? found->counted_as : "");
  }
  set.variables.insert(set.variables.end(), {rate, use});
  set.texts.push_back(counted);
  table.list("gas_taken_up", "taken up from air by all vessels; missing where none is", "kg s-1", {"component"}, [&](const Snapshot& s) {
    std::vector<double> out(circuit.chemistry->component_names.size(), std::nan(""));
    for (std::size_t l = 0; l < circuit.ledger_component.size(); ++l) {
      double& sum = out[circuit.ledger_component[l]];
      sum = (std::isnan(sum) ? 0 : sum) + s.ledger[l] * circuit.chemistry->component_mass[circuit.ledger_component[l]];
    }
    return out;
  });
  table.list("oxygen_taken_up", "oxygen dissolved from air", "mol s-1", {"unit"}, [&](const Snapshot& s) {
    std::vector<double> out;
    for (int u : result.vessels) {
      double sum = std::nan("");
      for (std::size_t l = 0; l < circuit.ledger_unit.size(); ++l)
        if (circuit.ledger_unit[l] == u && circuit.chemistry->component_names[circuit.ledger_component[l]] == "O2") sum = s.ledger[l];
      out.push_back(sum);
    }
    return out;
  });
}

void add_closures(TimeTable& table) {
  table.per_time("closure_elements", "worst imbalance of an element but H and O", "1", [](const Snapshot& s) { return s.closures.elements; });
  table.per_time("closure_water", "worst imbalance of H and O", "1", [](const Snapshot& s) { return s.closures.water; });
  table.per_time("closure_mass", "imbalance of mass", "1", [](const Snapshot& s) { return s.closures.mass; });
  table.per_time("closure_charge", "worst |sum z N| / sum |z| N", "1", [](const Snapshot& s) { return s.closures.charge; });
  table.per_time("closure_mass_action", "worst |ln IAP - ln K|", "1", [](const Snapshot& s) { return s.closures.mass_action; });
  table.per_time("closure_cells", "worst imbalance of a component in a cell", "1", [](const Snapshot& s) { return s.closures.cell_balance; });
}

}  // namespace

ResultSet layout_of(const RunResult& result, const SpeciesLibrary& library, const SourceText& source) {
  ResultSet set;
  Rows rows;
  for (const Snapshot& row : result.history) rows.push_back(&row);
  if (rows.empty()) rows.push_back(&result.steady);
  add_source(set, source, "run");
  set.attributes.emplace_back("leat_mode", result.history.empty() ? "steady" : "through time");
  set.attributes.emplace_back("leat_activity_model", std::string(result.circuit->chemistry->activity->name()));
  set.attributes.emplace_back("leat_pregnant_liquor", result.circuit->streams[result.circuit->pregnant_liquor].name);
  add_axes(set, result, rows);
  add_chemistry(set, *result.circuit->chemistry, library);
  add_circuit(set, result);
  TimeTable table(set, rows, result.steady_ok ? &result.steady : nullptr);
  add_recoveries(table);
  add_units(table);
  add_streams(table, result);
  add_reagents(set, table, result);
  add_closures(table);
  table.add_twins();
  const CvodeStatistics& cv = result.statistics;
  set.variables.push_back({"newton_iterations", "iterations of the whole-circuit steady solve", "1", {}, {double(result.steady_report.circuit.iterations)}});
  set.variables.push_back({"time_steps", "steps of the integration through time", "1", {}, {double(cv.steps)}});
  set.variables.push_back({"rate_evaluations", "evaluations of the rates through time", "1", {}, {double(cv.rate_evaluations)}});
  add_cautions(set, result.cautions);
  set.texts.push_back({"failure", "why a steady state or a part of the history is not there; empty if all is", "", {result.failure}});
  return set;
}

ResultSet layout_of(const BeakerResult& result, const SpeciesLibrary& library, const SourceText& source) {
  ResultSet set;
  const Chemistry& c = *result.chemistry;
  add_source(set, source, "beaker");
  set.attributes.emplace_back("leat_activity_model", std::string(c.activity->name()));
  Axis step{"step", "step of the beaker, from 1", "1", {}, {}, false};
  for (std::size_t k = 0; k < result.steps.size(); ++k) step.values.push_back(static_cast<double>(k + 1));
  set.axes.push_back(step);
  add_chemistry(set, c, library);
  TextTable names{"step_name", "name of the step", "step", {}};
  for (const BeakerStep& one : result.steps) names.values.push_back(one.name);
  set.texts.push_back(names);
  const auto scalar = [&](const char* name, const char* meaning, const char* units, const std::function<double(const BeakerStep&)>& value) {
    Variable variable{name, meaning, units, {"step"}, {}};
    for (const BeakerStep& one : result.steps) variable.values.push_back(value(one));
    set.variables.push_back(variable);
  };
  const auto list = [&](const char* name, const char* meaning, const char* units, const char* axis, std::size_t count,
                        const std::function<const std::vector<double>&(const BeakerStep&)>& value) {
    Variable variable{name, meaning, units, {"step", axis}, {}};
    for (const BeakerStep& one : result.steps) variable.values.insert(variable.values.end(), value(one).begin(), value(one).begin() + count);
    set.variables.push_back(variable);
  };
  scalar("ph", "-log10 of the activity of H+", "1", [](const BeakerStep& s) { return s.state.ph; });
  scalar("ionic_strength", "ionic strength", "mol kg-1", [](const BeakerStep& s) { return s.state.ionic_strength; });
  scalar("water_activity", "activity of water", "1", [](const BeakerStep& s) { return s.state.water_activity; });
  scalar("temperature", "temperature", "K", [](const BeakerStep& s) { return s.temperature; });
  scalar("liquor_volume", "volume of the liquor", "m3", [](const BeakerStep& s) { return s.liquor_volume; });
  scalar("liquor_density", "density of the liquor", "kg m-3", [](const BeakerStep& s) { return s.liquor_density; });
  scalar("proton_added", "protons exchanged to hold a pH", "mol", [](const BeakerStep& s) { return s.proton_added; });
  scalar("dosed", "compound dosed to reach a pH", "mol", [](const BeakerStep& s) { return s.added.empty() ? std::nan("") : s.added.front(); });
  TextTable compound{"dosed_compound", "compound dosed to reach a pH", "step", {}};
  for (const BeakerStep& one : result.steps) compound.values.push_back(one.dosed);
  set.texts.push_back(compound);
  scalar("closure_cells", "worst imbalance of a component", "1", [](const BeakerStep& s) { return s.closure.balance; });
  scalar("closure_mass_action", "worst |ln IAP - ln K|", "1", [](const BeakerStep& s) { return s.closure.mass_action; });
  const std::size_t components = c.component_names.size();
  list("molality", "molality of a species", "mol kg-1", "species", c.species.size(), [](const BeakerStep& s) -> const std::vector<double>& { return s.state.molality; });
  list("total", "component in the beaker", "mol", "component", components, [](const BeakerStep& s) -> const std::vector<double>& { return s.totals; });
  list("dissolved", "component in the liquor", "mol", "component", components, [](const BeakerStep& s) -> const std::vector<double>& { return s.dissolved; });
  list("formed", "solid present", "mol", "mineral", c.phases.size(), [](const BeakerStep& s) -> const std::vector<double>& { return s.state.phase_amount; });
  list("saturation_index", "log10 of ion product over constant", "1", "mineral", c.phases.size(), [](const BeakerStep& s) -> const std::vector<double>& { return s.state.log10_omega; });
  Variable taken{"gas_taken_up", "gas taken up at a held pressure, as its dissolved form", "mol", {"step", "species"}, {}};
  for (const BeakerStep& one : result.steps)
    for (const MassActionRow& row : c.species) {
      const auto found = std::find_if(one.gas_taken_up.begin(), one.gas_taken_up.end(), [&](const auto& gas) { return gas.first == row.name; });
      taken.values.push_back(found == one.gas_taken_up.end() ? std::nan("") : found->second);
    }
  set.variables.push_back(taken);
  add_cautions(set, result.cautions);
  return set;
}

}  // namespace leat
