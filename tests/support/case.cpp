#include "tests/support/case.hpp"

#include <stdexcept>

#include "models/register/register_models.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

[[noreturn]] void refuse(const std::string& what) { throw std::runtime_error(what); }

std::string printed(const Diagnostics& diagnostics) {
  std::string text;
  for (const Diagnostic& fault : diagnostics.sorted_faults()) text += to_string(fault) + "\n";
  return text;
}

std::optional<Case> attempt(const std::string& text, const Catalogue& catalogue, Diagnostics& diagnostics) {
  auto flowsheet = read_flowsheet(text, "test.yaml", catalogue, diagnostics);
  if (!flowsheet || !diagnostics.ok()) return std::nullopt;
  auto built = build_circuit(*flowsheet, embedded_library(), catalogue, diagnostics);
  if (!built || !diagnostics.ok()) return std::nullopt;
  return Case{std::move(*flowsheet), std::move(*built)};
}

int found(int index, const std::string& what) {
  if (index < 0) refuse("no " + what);
  return index;
}

}  // namespace

const Catalogue& registered() {
  static const Catalogue catalogue = register_models();
  return catalogue;
}

Case build(const std::string& text, const Catalogue& catalogue) {
  Diagnostics diagnostics;
  auto made = attempt(text, catalogue, diagnostics);
  if (!made) refuse("the flowsheet has faults:\n" + printed(diagnostics) + text);
  return std::move(*made);
}

std::string faults_of(const std::string& text, const Catalogue& catalogue) {
  Diagnostics diagnostics;
  const auto made = attempt(text, catalogue, diagnostics);
  if (!made && diagnostics.ok()) return "nothing was built, and no fault says why\n";
  return printed(diagnostics);
}

RunResult run(const std::string& text, const RunOptions& options, const Catalogue& catalogue) {
  RunResult result = build(text, catalogue).run(options);
  EXPECT_TRUE(result.steady_ok && (!result.timed || result.time_ok)) << result.failure << "\n" << text;
  return result;
}

int stream_of(const RunResult& result, const std::string& name) {
  const int u = result.circuit->find_unit(name);
  if (u >= 0 && result.circuit->units[u].operation->traits().outlets.size() == 1) return result.circuit->units[u].first_stream;
  return found(result.circuit->find_stream(name), "stream " + name);
}

const StreamSnapshot& stream(const RunResult& result, const Snapshot& at, const std::string& name) {
  return at.streams.at(stream_of(result, name));
}

const UnitSnapshot& unit(const RunResult& result, const Snapshot& at, const std::string& name) {
  const int u = found(result.circuit->find_unit(name), "unit " + name);
  for (std::size_t v = 0; v < result.vessels.size(); ++v)
    if (result.vessels[v] == u) return at.units.at(v);
  refuse(name + " holds nothing");
}

int component_of(const RunResult& result, const std::string& name) {
  return found(result.circuit->chemistry->find_component(name), "component " + name);
}

int element_of(const RunResult& result, const std::string& name) {
  for (std::size_t e = 0; e < result.circuit->elements.size(); ++e)
    if (result.circuit->elements[e] == name) return static_cast<int>(e);
  refuse("no element " + name);
}

int lot_of(const RunResult& result, const std::string& name) {
  const std::vector<Lot>& lots = result.circuit->context->lots;
  for (std::size_t k = 0; k < lots.size(); ++k)
    if (lots[k].name == name) return static_cast<int>(k);
  refuse("no lot " + name);
}

double flow(const RunResult& result, const Snapshot& at, const std::string& stream_name, const std::string& component) {
  return stream(result, at, stream_name).flow.at(component_of(result, component));
}

double content(const RunResult& result, const Snapshot& at, const std::string& stream_name, const std::string& component) {
  return flow(result, at, stream_name, component) / stream(result, at, stream_name).liquor_volume;
}

double lot_flow(const RunResult& result, const Snapshot& at, const std::string& stream_name, const std::string& lot) {
  return stream(result, at, stream_name).flow.at(result.circuit->context->layout.lot(lot_of(result, lot)));
}

double held(const RunResult& result, const Snapshot& at, const std::string& unit_name, const std::string& component) {
  return unit(result, at, unit_name).total.at(component_of(result, component));
}

std::size_t recovered_of(const RunResult& result, const std::string& element) {
  const int e = element_of(result, element);
  for (std::size_t k = 0; k < result.recovered.size(); ++k)
    if (result.recovered[k] == e) return k;
  refuse("no recovery of " + element);
}

double extraction(const RunResult& result, const Snapshot& at, const std::string& element) {
  return at.extraction_now.at(recovered_of(result, element));
}

double recovery(const RunResult& result, const Snapshot& at, const std::string& element) {
  return at.recovery_now.at(recovered_of(result, element));
}

}  // namespace leat::test
