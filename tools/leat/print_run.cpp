#include "tools/leat/print_run.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"
#include "sim/results/table_text.hpp"
#include "sim/run/cautions.hpp"

namespace leat {
namespace {

constexpr double hour = 3600;

void heading(const std::string& text) { fmt::print("\n{}\n", text); }

double percent(double share) { return 100 * share; }

void stream_table(const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  std::vector<TableColumn> columns = {{"stream", ""}, {"to", ""}, {"pulp", "m3/h"}, {"liquor", "m3/h"}, {"solids", "t/h"}, {"solids", "%"}, {"pH", ""}};
  for (int e : result.recovered) columns.push_back({circuit.elements[e], "mg/L"});
  TextTableWriter table(columns);
  for (std::size_t s = 0; s < circuit.streams.size(); ++s) {
    const CircuitStream& stream = circuit.streams[s];
    const StreamSnapshot& one = result.steady.streams[s];
    std::vector<TextTableWriter::Cell> row = {stream.name, stream.taker >= 0 ? circuit.units[stream.taker].name : "> " + stream.leaves_as,
                                              one.pulp_volume * hour, one.liquor_volume * hour, one.solids * hour / 1000,
                                              one.mass > 0 ? percent(one.solids / one.mass) : std::nan(""), one.ph};
    for (int e : result.recovered) {
      double amount = 0;
      for (int j = 0; j < circuit.chemistry->component_count(); ++j) amount += circuit.component_elements[j][e] * one.dissolved[j];
      row.push_back(one.liquor_volume > 0 ? 1000 * std::max(0.0, amount) * circuit.element_mass[e] / one.liquor_volume : std::nan(""));
    }
    table.add_row(row);
  }
  heading("Streams at steady state (metals dissolved in the liquor)");
  fmt::print("{}", table.to_string());
}

void stage_profile(const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  const Chemistry& c = *circuit.chemistry;
  std::vector<TableColumn> columns = {{"vessel", ""}, {"volume", "m3"}, {"time", "h"}, {"T", "degC"}, {"pH", ""}, {"I", "mol/kg"}, {"density", "kg/m3"}};
  std::vector<int> free;
  for (const char* name : {"NH3", "CN^-", "Cl^-", "O2"}) {
    const int i = c.find_species(name);
    if (i >= 0) {
      free.push_back(i);
      columns.push_back({std::string("free ") + name, "mol/kg"});
    }
  }
  for (int e : result.recovered) columns.push_back({circuit.elements[e] + " left", "%"});
  columns.push_back({"formed", ""});
  TextTableWriter table(columns);
  for (std::size_t v = 0; v < result.vessels.size(); ++v) {
    const UnitSnapshot& unit = result.steady.units[v];
    std::vector<TextTableWriter::Cell> row = {circuit.units[result.vessels[v]].name, unit.pulp_volume, unit.pulp_volume / unit.outlet_flow / hour,
                                              unit.temperature - zero_celsius, unit.ph, unit.ionic_strength, unit.liquor_density};
    for (int i : free) row.push_back(unit.molality[i]);
    // Undissolved share of what was fed, in the pulp that leaves this vessel.
    const std::vector<double>& leaving = result.steady.streams[circuit.units[result.vessels[v]].first_stream].flow;
    for (int e : result.recovered) row.push_back(percent(circuit.element_in_lots(e, leaving) / circuit.fed_solids[e]));
    std::string formed;
    for (std::size_t s = 0; s < c.phases.size(); ++s)
      if (unit.formed[s] > 0) formed += (formed.empty() ? "" : ", ") + c.phases[s].name;
    row.push_back(formed.empty() ? "-" : formed);
    table.add_row(row);
  }
  heading("Stage profile at steady state");
  fmt::print("{}", table.to_string());
}

void recovery_table(const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  const std::vector<std::string>& families = circuit.chemistry->families;
  std::vector<bool> shown(families.size(), false);
  for (std::size_t f = 0; f < families.size(); ++f)
    for (std::size_t e = 0; e < result.recovered.size(); ++e)
      shown[f] = shown[f] || result.steady.recovery_by_family[e * families.size() + f] > 5e-6;
  std::vector<TableColumn> columns = {{"metal", ""}, {"fed", "kg/h"}, {"extraction", "%"}, {"formed, leaving", "%"}, {"recovery", "%"}};
  for (std::size_t f = 0; f < families.size(); ++f)
    if (shown[f]) columns.push_back({"as " + families[f], "%"});
  TextTableWriter table(columns);
  for (std::size_t e = 0; e < result.recovered.size(); ++e) {
    const int element = result.recovered[e];
    std::vector<TextTableWriter::Cell> row = {circuit.elements[element], circuit.fed_solids[element] * circuit.element_mass[element] * hour,
                                              percent(result.steady.extraction_now[e]), percent(result.steady.formed_leaving_now[e]),
                                              percent(result.steady.recovery_now[e])};
    for (std::size_t f = 0; f < families.size(); ++f)
      if (shown[f]) row.push_back(percent(result.steady.recovery_by_family[e * families.size() + f]));
    table.add_row(row);
  }
  heading("Recovery into " + circuit.streams[circuit.pregnant_liquor].name + " by family of complexes, steady");
  fmt::print("{}", table.to_string());
}

void reagent_table(const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  TextTableWriter table({{"reagent", ""}, {"counted as", ""}, {"rate", "kg/h"}, {"use", "kg/t solids"}});
  for (const ReagentUse& use : circuit.reagents)
    table.add_row({use.stream, use.counted_as, use.rate * hour, circuit.dry_solids > 0 ? 1000 * use.rate / circuit.dry_solids : std::nan("")});
  // What dissolves from gases is a reagent too: one row a component, all vessels together.
  for (int j = 0; j < circuit.chemistry->component_count(); ++j) {
    double rate = 0;
    int vessels = 0;
    for (std::size_t l = 0; l < circuit.ledger_component.size(); ++l)
      if (circuit.ledger_component[l] == j) rate += result.steady.ledger[l] * circuit.chemistry->component_mass[j], ++vessels;
    if (vessels > 0)
      table.add_row({fmt::format("from air, {} vessel{}", vessels, vessels > 1 ? "s" : ""), circuit.chemistry->component_names[j], rate * hour,
                     circuit.dry_solids > 0 ? 1000 * rate / circuit.dry_solids : std::nan("")});
  }
  heading("Reagents");
  fmt::print("{}", table.to_string());
}

void closure_table(const RunResult& result) {
  TextTableWriter table({{"closure", ""}, {"elements", "1"}, {"water", "1"}, {"mass", "1"}, {"charge", "1"}, {"mass action", "ln"}, {"cells", "1"}}, 2);
  const auto row = [&](const std::string& name, const Closures& c) {
    table.add_row({name, c.elements, c.water, c.mass, c.charge, c.mass_action, c.cell_balance});
  };
  if (result.steady_ok) row("steady", result.steady.closures);
  if (!result.history.empty()) {
    Closures worst;
    for (std::size_t k = 1; k < result.history.size(); ++k) {
      const Closures& c = result.history[k].closures;
      worst.elements = std::max(worst.elements, c.elements);
      worst.water = std::max(worst.water, c.water);
      worst.mass = std::max(worst.mass, c.mass);
      worst.charge = std::max(worst.charge, c.charge);
      worst.mass_action = std::max(worst.mass_action, c.mass_action);
      worst.cell_balance = std::max(worst.cell_balance, c.cell_balance);
    }
    row("through time, worst", worst);
  }
  heading("Closure (computed afresh from states and flows)");
  fmt::print("{}", table.to_string());
}

void history_table(const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  std::vector<TableColumn> columns = {{"time", "h"}};
  for (int e : result.recovered) {
    columns.push_back({circuit.elements[e] + " recovery", "%"});
    columns.push_back({"to date", "%"});
  }
  columns.push_back({"pH " + circuit.units[result.vessels.back()].name, ""});
  TextTableWriter table(columns);
  const std::size_t rows = result.history.size(), shown = std::min<std::size_t>(rows, 13);
  for (std::size_t k = 0; k < shown; ++k) {
    const Snapshot& one = result.history[shown > 1 ? k * (rows - 1) / (shown - 1) : 0];
    std::vector<TextTableWriter::Cell> row = {one.time / hour};
    for (std::size_t e = 0; e < result.recovered.size(); ++e) {
      row.push_back(percent(one.recovery_now[e]));
      row.push_back(percent(one.recovery_to_date[e]));
    }
    row.push_back(one.units.back().ph);
    table.add_row(row);
  }
  heading(fmt::format("Through time ({} of {} stored rows)", shown, rows));
  fmt::print("{}", table.to_string());
}

}  // namespace

void print_cautions(const std::vector<Caution>& cautions) {
  heading("Cautions");
  // One line a kind: the worst finding in full, the others counted.
  std::vector<std::string> kinds;
  for (const Caution& one : cautions)
    if (std::find(kinds.begin(), kinds.end(), one.kind) == kinds.end()) kinds.push_back(one.kind);
  for (const std::string& kind : kinds) {
    const Caution* worst = nullptr;
    int places = 0;
    for (const Caution& one : cautions)
      if (one.kind == kind) {
        ++places;
        if (!worst || one.weight > worst->weight) worst = &one;
      }
    fmt::print("  {}: {}{}\n", kind, worst->text,
               places > 1 ? fmt::format(" (the worst of {} places, all in the results file)", places) : "");
  }
  fmt::print("  {}\n", closing_caution());
}

void print_run(const RunResult& result) {
  const Circuit& circuit = *result.circuit;
  if (!circuit.title.empty()) fmt::print("{}\n", circuit.title);
  if (result.steady_ok) {
    stream_table(result);
    stage_profile(result);
    recovery_table(result);
    if (!circuit.reagents.empty() || circuit.ledgers > 0) reagent_table(result);
  }
  if (!result.history.empty()) history_table(result);
  closure_table(result);
  print_cautions(result.cautions);
}

}  // namespace leat
