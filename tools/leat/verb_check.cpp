#include <fmt/format.h>

#include <cmath>

#include "models/register/register_models.hpp"
#include "sim/circuit/build_circuit.hpp"
#include "sim/input/read_beaker.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "sim/results/table_text.hpp"
#include "sim/run/cautions.hpp"
#include "sim/run/speciate.hpp"
#include "tools/leat/print_run.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

std::string joined(const std::vector<std::string>& list) {
  std::string text;
  for (const std::string& one : list) text += (text.empty() ? "" : ", ") + one;
  return text.empty() ? "none" : text;
}

void tell_case(const Flowsheet& flowsheet, const BuiltCase& built) {
  const Circuit& circuit = *built.steady;
  const Chemistry& c = *circuit.chemistry;
  fmt::print("{}\n\n{} units ({} with hold-up), {} streams, {} unknowns at steady state{}\n", flowsheet.title, circuit.units.size(), circuit.holding.size(),
             circuit.streams.size(), circuit.states, built.timed ? fmt::format(", {:.4g} h through time", flowsheet.history->until / 3600) : "");
  TextTableWriter units({{"unit", ""}, {"kind", ""}, {"takes", ""}, {"gives", ""}});
  for (const CircuitUnit& unit : circuit.units) {
    std::vector<std::string> takes, gives;
    for (int s : unit.takes) takes.push_back(circuit.streams[s].name);
    for (std::size_t o = 0; o < unit.operation->traits().outlets.size(); ++o) gives.push_back(circuit.streams[unit.first_stream + o].name);
    units.add_row({unit.name, unit.kind, joined(takes), joined(gives)});
  }
  fmt::print("{}", units.to_string());
  fmt::print("\nactivity: {}; {} dissolved species of {} components; site pressure {:.4g} kPa\n", c.activity->name(), c.species.size(),
             c.component_count() + 1, built.site_pressure / 1000);
  fmt::print("may form: {}\nindex watched: {}\nfed without a law, at equilibrium: {}\n", joined(built.may_form), joined(built.watched), joined(built.at_equilibrium));
  TextTableWriter lots({{"lot", ""}, {"law", ""}});
  for (const Lot& lot : circuit.context->lots) lots.add_row({lot.name, lot.law ? std::string(lot.law->name()) : "inert"});
  fmt::print("\n{}", lots.to_string());
}

void tell_constants(const Chemistry& c, const SpeciesLibrary& library, const std::vector<double>& temperatures) {
  TextTableWriter table({{"constant", ""}, {"log10 K", ""}, {"spread", ""}, {"reaction", ""}, {"evidence", ""}, {"source", ""}});
  for (const UsedConstant& used : c.constants) {
    const auto source = library.sources.find(used.constant.provenance.source);
    table.add_row({used.name, fmt::format("{:.2f}", used.constant.log10_k), used.constant.spread_assigned ? "assigned" : fmt::format("{:.2f}", used.constant.spread),
                   used.reaction, used.constant.provenance.evidence, source == library.sources.end() ? used.constant.provenance.source : source->first});
  }
  fmt::print("\nConstants in play\n{}", table.to_string());
  std::vector<Caution> cautions;
  watch_constants(c, temperatures, cautions);
  print_cautions(cautions);
}

}  // namespace

int check_verb(const std::string& file) {
  std::string text;
  if (!read_text(file, text)) return Exit::input_faults;
  Diagnostics diagnostics;
  const SpeciesLibrary library = load_library();
  const Catalogue catalogue = register_models();
  const std::string kind = file_kind(text, file, diagnostics);
  if (kind == "beaker") {
    const auto beaker = read_beaker(text, file, catalogue, diagnostics);
    if (!beaker || !diagnostics.ok()) return tell_faults(diagnostics, file);
    const auto result = speciate(*beaker, library, catalogue, diagnostics);
    if (!result || !diagnostics.ok()) return tell_faults(diagnostics, file);
    fmt::print("{}\n\n{} steps, {} species\n", beaker->title, result->steps.size(), result->chemistry->species.size());
    std::vector<double> temperatures;
    for (const BeakerStep& step : result->steps) temperatures.push_back(step.temperature);
    tell_constants(*result->chemistry, library, temperatures);
    return Exit::done;
  }
  const auto flowsheet = read_flowsheet(text, file, catalogue, diagnostics);
  if (!flowsheet) return tell_faults(diagnostics, file);
  const auto built = build_circuit(*flowsheet, library, catalogue, diagnostics);
  if (!built || !diagnostics.ok()) return tell_faults(diagnostics, file);
  tell_cautions(diagnostics);
  tell_case(*flowsheet, *built);
  std::vector<double> temperatures;
  for (const CircuitUnit& unit : built->steady->units) temperatures.push_back(unit.operation->temperature());
  tell_constants(*built->steady->chemistry, *built->library, temperatures);
  return Exit::done;
}

}  // namespace leat
