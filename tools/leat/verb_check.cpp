#include <fmt/format.h>
#include <fmt/ranges.h>

#include "sim/circuit/build_circuit.hpp"
#include "sim/input/read_beaker.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "sim/run/cautions.hpp"
#include "sim/run/speciate.hpp"
#include "tools/leat/solve_case.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

using Cell = TextTableWriter::Cell;

std::string joined(const std::vector<std::string>& list) { return list.empty() ? "none" : fmt::format("{}", fmt::join(list, ", ")); }

ResultTable units_of(const Circuit& circuit) {
  ResultTable units{"units", "Units", {{"unit", ""}, {"kind", ""}, {"takes", ""}, {"gives", ""}}, {}, ""};
  for (const CircuitUnit& unit : circuit.units) {
    std::vector<std::string> takes, gives;
    for (int s : unit.takes) takes.push_back(circuit.streams[s].name);
    for (std::size_t o = 0; o < unit.operation->traits().outlets.size(); ++o) gives.push_back(circuit.streams[unit.first_stream + o].name);
    units.rows.push_back({unit.name, unit.kind, joined(takes), joined(gives)});
  }
  return units;
}

void tell_case(const Flowsheet& flowsheet, const BuiltCase& built, Answer& answer) {
  const Circuit& circuit = *built.steady;
  const Chemistry& c = *circuit.chemistry;
  answer.title = flowsheet.title;
  answer.lines = {
      fmt::format("{} units ({} with hold-up), {} streams, {} unknowns at steady state{}", circuit.units.size(), circuit.holding.size(),
                  circuit.streams.size(), circuit.states, built.timed ? fmt::format(", {:.4g} h through time", flowsheet.history->until / 3600) : ""),
      fmt::format("activity: {}; {} dissolved species of {} components; site pressure {:.4g} kPa", c.activity->name(), c.species.size(),
                  c.component_count() + 1, built.site_pressure / 1000),
      "may form: " + joined(built.may_form),
      "index watched: " + joined(built.watched),
      "fed without a law, at equilibrium: " + joined(built.at_equilibrium)};
  ResultTable lots{"lots", "Fed minerals", {{"lot", ""}, {"law", ""}}, {}, ""};
  for (const Lot& lot : circuit.context->lots) lots.rows.push_back({lot.name, lot.law ? std::string(lot.law->name()) : "inert"});
  answer.tables = {units_of(circuit), lots};
}

void tell_constants(const Chemistry& c, const std::vector<double>& temperatures, Answer& answer) {
  ResultTable table{"constants", "Constants in play",
                    {{"constant", ""}, {"log10 K", "", 2}, {"spread", "", 2}, {"reaction", ""}, {"evidence", ""}, {"source", ""}}, {}, ""};
  for (const UsedConstant& used : c.constants)
    table.rows.push_back({used.name, used.constant.log10_k, used.constant.spread_assigned ? Cell("assigned") : Cell(used.constant.spread),
                          used.reaction, used.constant.provenance.evidence, used.constant.provenance.source});
  answer.tables.push_back(table);
  std::vector<Caution> cautions;
  watch_constants(c, temperatures, cautions);
  answer.cautions = cautions_in_short(cautions);
}

void check_beaker(const CaseSolver& solver, const std::string& text, Answer& answer) {
  Diagnostics diagnostics;
  const auto beaker = read_beaker(text, answer.file, solver.catalogue(), diagnostics);
  const auto result = beaker && diagnostics.ok() ? speciate(*beaker, solver.library(), solver.catalogue(), diagnostics) : std::nullopt;
  if (!take_findings(diagnostics, answer) || !result) return;
  answer.title = beaker->title;
  answer.lines = {fmt::format("{} steps, {} species", result->steps.size(), result->chemistry->species.size())};
  std::vector<double> temperatures;
  for (const BeakerStep& step : result->steps) temperatures.push_back(step.temperature);
  tell_constants(*result->chemistry, temperatures, answer);
}

void check_flowsheet(const CaseSolver& solver, const std::string& text, Answer& answer) {
  Diagnostics diagnostics;
  const auto flowsheet = read_flowsheet(text, answer.file, solver.catalogue(), diagnostics);
  const auto built = flowsheet ? build_circuit(*flowsheet, solver.library(), solver.catalogue(), diagnostics) : std::nullopt;
  if (!take_findings(diagnostics, answer) || !built) return;
  tell_case(*flowsheet, *built, answer);
  std::vector<double> temperatures;
  for (const CircuitUnit& unit : built->steady->units) temperatures.push_back(unit.operation->temperature());
  tell_constants(*built->steady->chemistry, temperatures, answer);
}

}  // namespace

int check_verb(const RunArguments& arguments) {
  Answer answer;
  answer.verb = "check";
  answer.file = arguments.file;
  Diagnostics diagnostics;
  const std::string text = read_text(arguments.file, diagnostics);
  if (!take_findings(diagnostics, answer)) return say(answer, arguments.manner);
  Diagnostics unused;  // the reader of the kind tells the same fault with the rest
  const bool beaker = file_kind(text, arguments.file, unused) == "beaker";
  const std::vector<std::string> names = beaker ? std::vector<std::string>{"constants"} : std::vector<std::string>{"units", "lots", "constants"};
  if (!knows_csv(arguments.manner, names, answer)) return say(answer, arguments.manner);
  const CaseSolver solver;
  if (beaker) check_beaker(solver, text, answer);
  else check_flowsheet(solver, text, answer);
  return say(answer, arguments.manner);
}

}  // namespace leat
