#include <fmt/format.h>

#include <algorithm>
#include <charconv>
#include <cmath>

#include "sim/results/result_access.hpp"
#include "sim/results/result_tables_parts.hpp"
#include "sim/results/result_view.hpp"

namespace leat {
namespace {

using Cell = TextTableWriter::Cell;
using Row = std::vector<Cell>;

constexpr double least_share = 1e-3;  // of a metal from which on a species has a column [1]

std::size_t rungs_of(const ResultView& view) { return view.size("rung"); }

bool is_number(const std::string& text) {
  double value = 0;
  return std::from_chars(text.data(), text.data() + text.size(), value).ec == std::errc();
}

// Whether the stepped values are quantities; words such as the name of an activity model are shown as typed.
bool steps_numbers(const ResultView& view) {
  for (std::size_t r = 0; r < rungs_of(view); ++r)
    if (!is_number(view.text("value_as_typed", r))) return false;
  return true;
}

// What is stepped: a path, or words where the series step different ones.
std::string stepped_name(const ResultView& view) {
  const std::string path = view.attribute("leat_stepped_path");
  for (std::size_t s = 0; s < view.size("series_name"); ++s)
    if (view.text("stepped_path", s) != path) return "stepped input";
  return path;
}

// The first columns of each table: which rung. Values of different kinds (`mixed`) are shown as typed.
struct RungColumns {
  explicit RungColumns(const ResultView& of) : view(of), numbers(steps_numbers(of) && of.attribute("leat_stepped_units") != "mixed") {
    const std::string unit = view.attribute("leat_stepped_units");
    columns = {{"series", ""}, {stepped_name(view), numbers && unit != "1" ? unit : ""}};
  }
  Row row(std::size_t r) const { return {view.text("series", r), numbers ? Cell(view.at("stepped", {r})) : Cell(view.text("value_as_typed", r))}; }

  const ResultView& view;
  bool numbers;
  std::vector<TableColumn> columns;
};

// Columns that say something in at least one rung.
template <class Value>
std::vector<std::size_t> known(const ResultView& view, const char* axis, const Value& value) {
  std::vector<std::size_t> found;
  for (std::size_t i = 0; i < view.size(axis); ++i) {
    bool any = false;
    for (std::size_t r = 0; r < rungs_of(view); ++r) any = any || !std::isnan(value(r, i));
    if (any) found.push_back(i);
  }
  return found;
}

// A component is a metal where species share it.
bool is_metal(const ResultView& view, std::size_t component) {
  for (std::size_t r = 0; r < rungs_of(view); ++r)
    for (std::size_t i = 0; i < view.size("species"); ++i)
      if (!std::isnan(view.at("share", {r, component, i}))) return true;
  return false;
}

// Whether a component such as Cu(II) is a form of a metal that circuits were asked to report.
bool is_reported(const ResultView& view, const std::string& component) {
  const std::string symbol = component.substr(0, component.find('('));
  const std::vector<std::string>& metals = view.labels("element");
  return std::find(metals.begin(), metals.end(), symbol) != metals.end();
}

// Metals that are told: of circuits those they report, of beakers all.
std::vector<std::size_t> metals_of(const ResultView& view) {
  const bool circuits = view.attribute("leat_ladder_of") == "run";
  std::vector<std::size_t> metals;
  for (std::size_t j = 0; j < view.size("component"); ++j)
    if (is_metal(view, j) && (!circuits || is_reported(view, view.labels("component")[j]))) metals.push_back(j);
  return metals;
}

// Solids the liquor stands beside: what is dissolved of their metals is the solubility there.
std::string solids_of(const ResultView& view, std::size_t rung) {
  std::vector<std::string> solids;
  for (std::size_t m = 0; m < view.size("mineral"); ++m)
    if (view.at("formed", {rung, m}) > 0) solids.push_back(view.labels("mineral")[m]);
  return listed(solids);
}

// Dissolved metal as mass, where the file has its molar mass; else as amount.
void add_dissolved(const ResultView& view, ResultTable& table) {
  for (const std::size_t j : metals_of(view)) {
    const double mass = view.at("component_mass", {j});  // kg/mol
    const bool weighed = !std::isnan(mass);
    table.columns.push_back({view.labels("component")[j], weighed ? "mg/L" : "mmol/L"});
    for (std::size_t r = 0; r < rungs_of(view); ++r) table.rows[r].push_back(view.at("dissolved", {r, j}) * (weighed ? 1000 * mass : 1));
  }
}

void add_shares(const ResultView& view, const char* axis, const char* variable, const std::string& word, const char* unit, double factor, ResultTable& table) {
  const auto value = [&](std::size_t r, std::size_t i) { return view.at(variable, {r, i}); };
  for (const std::size_t i : known(view, axis, value)) {
    table.columns.push_back({view.labels(axis)[i] + word, unit});
    for (std::size_t r = 0; r < rungs_of(view); ++r) table.rows[r].push_back(factor * value(r, i));
  }
}

ResultTable rung_table(const ResultView& view) {
  const RungColumns first(view);
  ResultTable table{"ladder", "Ladder (metals dissolved in the liquor)", first.columns, {}, ""};
  table.columns.insert(table.columns.end(), {{"status", ""}, {"pH", ""}, {"I", "mol/kg"}});
  for (std::size_t r = 0; r < rungs_of(view); ++r) {
    Row row = first.row(r);
    row.insert(row.end(), {view.text("status", r), view.at("ph", {r}), view.at("ionic_strength", {r})});
    table.rows.push_back(std::move(row));
  }
  add_dissolved(view, table);
  add_shares(view, "element", "extraction", " extraction", "%", 100, table);
  add_shares(view, "element", "recovery", " recovery", "%", 100, table);
  add_shares(view, "stream", "reagent_consumption", "", "kg/t solids", 1000, table);
  table.columns.push_back({"beside", ""});
  for (std::size_t r = 0; r < rungs_of(view); ++r) table.rows[r].push_back(solids_of(view, r));
  table.note = "beside: solids at equilibrium with this liquor; what is dissolved of their metals is the solubility there";
  return table;
}

ResultTable distribution_table(const ResultView& view) {
  const RungColumns first(view);
  ResultTable table{"distribution", "Distribution of the dissolved metals (species with at least 0.1 % somewhere)", first.columns, {}, ""};
  for (std::size_t r = 0; r < rungs_of(view); ++r) table.rows.push_back(first.row(r));
  for (const std::size_t j : metals_of(view))
    for (std::size_t i = 0; i < view.size("species"); ++i) {
      double most = 0;
      for (std::size_t r = 0; r < rungs_of(view); ++r) most = std::fmax(most, view.at("share", {r, j, i}));
      if (most < least_share) continue;
      table.columns.push_back({view.labels("species")[i], "% of " + view.labels("component")[j]});
      for (std::size_t r = 0; r < rungs_of(view); ++r) table.rows[r].push_back(percent(view.at("share", {r, j, i})));
    }
  if (table.columns.size() == first.columns.size()) table.rows.clear();
  return table;
}

ResultTable failure_table(const ResultView& view) {
  const RungColumns first(view);
  ResultTable table{"failures", "Rungs that are not there", {{"rung", ""}}, {}, ""};
  table.columns.insert(table.columns.end(), first.columns.begin(), first.columns.end());
  table.columns.insert(table.columns.end(), {{"status", ""}, {"reason", ""}});
  for (std::size_t r = 0; r < rungs_of(view); ++r) {
    const std::string status = view.text("status", r);
    if (status == "solved") continue;
    Row row = {static_cast<double>(r + 1)};
    for (Cell& cell : first.row(r)) row.push_back(std::move(cell));
    row.insert(row.end(), {status, view.text("reason", r)});
    table.rows.push_back(std::move(row));
  }
  table.columns.front().decimals = 0;
  return table;
}

}  // namespace

std::vector<ResultTable> ladder_tables(const ResultSet& results) {
  const ResultView view(results);
  return {rung_table(view), distribution_table(view), failure_table(view)};
}

}  // namespace leat
