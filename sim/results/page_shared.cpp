#include <algorithm>
#include <cmath>
#include <fmt/format.h>
#include <map>
#include <sstream>

#include "models/core/constants.hpp"
#include "sim/results/page_sections.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

// Beginnings of the cautions about harm to people; they stand first and apart.
constexpr const char* hazards[] = {"ammonia vapour",   "hydrogen cyanide", "silver ammine",    "acid meets",
                                   "cyanide effluent", "chlorine",         "hydrogen sulfide", "vapour"};

bool is_hazard(const std::string& line) {
  const std::string kind = line.substr(0, line.find(':'));
  return std::any_of(std::begin(hazards), std::end(hazards), [&](const char* word) { return kind.find(word) != std::string::npos; });
}

std::string list_html(const std::vector<std::string>& lines) {
  std::string html = "<ul>\n";
  for (const std::string& line : lines) {
    const std::size_t colon = line.find(": ");
    html += colon == std::string::npos
                ? "<li>" + escaped(line) + "</li>\n"
                : "<li><strong>" + escaped(line.substr(0, colon)) + ":</strong> " + escaped(line.substr(colon + 2)) + "</li>\n";
  }
  return html + "</ul>\n";
}

double worst(const Variable& variable) {
  double most = 0;
  for (double value : variable.values)
    if (std::isfinite(value)) most = std::max(most, std::abs(value));
  return most;
}

// The largest of the first named variables that the file has: steady ones where there is a steady state.
std::optional<double> worst_of(const ResultView& view, std::initializer_list<const char*> names) {
  std::optional<double> most;
  for (const char* name : names) {
    const Variable* variable = find_variable(view.results(), std::string("steady_") + name);
    if (!variable) variable = find_variable(view.results(), name);
    if (variable) most = std::max(most.value_or(0), worst(*variable));
  }
  return most;
}

std::string power(double value) { return value == 0 ? "exactly 0" : fmt::format("{:.0e}", value); }

}  // namespace

bool TableShelf::has(std::string_view name) const {
  return std::any_of(tables_.begin(), tables_.end(), [&](const ResultTable& one) { return one.name == name && !one.rows.empty(); });
}

void TableShelf::take(PageBuilder& page, std::string_view name, bool tall) {
  for (const ResultTable& table : tables_)
    if (table.name == name) page.table({table, table.rows.size() > 8, tall, {}, most_rows});
  drop(name);
}

void TableShelf::drop(std::string_view name) {
  std::erase_if(tables_, [&](const ResultTable& table) { return table.name == name; });
}

void TableShelf::take_rest(PageBuilder& page) {
  std::erase_if(tables_, [](const ResultTable& table) { return table.rows.empty(); });
  if (tables_.empty()) return;
  page.section("further", "Further tables");
  for (const ResultTable& table : tables_) page.table({table, table.rows.size() > 8, table.rows.size() > 30, {}, most_rows});
  tables_.clear();
}

void add_caution_boxes(PageBuilder& page, const std::vector<std::string>& lines) {
  std::vector<std::string> grave, other;
  for (const std::string& line : lines)
    if (!line.empty()) (is_hazard(line) ? grave : other).push_back(line);
  if (!grave.empty()) page.html("<div class=\"hazards\" role=\"note\"><h3>Hazards</h3>\n" + list_html(grave) + "</div>\n");
  if (!other.empty()) page.html("<div class=\"cautions\" role=\"note\"><h3>Cautions</h3>\n" + list_html(other) + "</div>\n");
}

void add_cautions(PageBuilder& page, const ResultView& view) {
  if (const std::string failure = view.text("failure"); !failure.empty())
    page.html("<div class=\"failure\" role=\"note\"><strong>Not all is there:</strong> " + escaped(failure) + "</div>\n");
  std::istringstream text(find_texts(view.results(), "cautions_in_short") ? view.text("cautions_in_short") : view.text("cautions"));
  std::vector<std::string> lines;
  for (std::string line; std::getline(text, line);) lines.push_back(line);
  add_caution_boxes(page, lines);
}

std::string closure_words(const ResultView& view) {
  const auto balances = worst_of(view, {"closure_elements", "closure_water", "closure_mass", "closure_charge", "closure_cells", "closure"});
  if (!balances) return {};
  std::string words = fmt::format("All balances close to {}", power(*balances));
  if (const auto action = worst_of(view, {"closure_mass_action"}))
    words += fmt::format(", the laws of mass action to {} (natural logarithm)", power(*action));
  words += view.has("steady_closure_elements") ? ", computed afresh from the steady state's flows." : ", computed afresh from states and flows.";
  if (view.has("steady_closure_elements") && view.attribute("leat_mode") == "through time") {
    double most = 0;
    for (const char* name : {"closure_elements", "closure_water", "closure_mass", "closure_charge", "closure_cells"})
      if (const Variable* variable = find_variable(view.results(), name)) most = std::max(most, worst(*variable));
    words += fmt::format(" Through time they close to {} at worst.", power(most));
  }
  return words;
}

void add_constants(PageBuilder& page, const ResultView& view) {
  if (view.size("constant") == 0) return;
  page.section("constants", "Constants used");
  page.paragraph("Every equilibrium constant in play, as measured, with where it is from and how well that is known. Press a heading to sort.");
  ResultTable table{"constants",
                    "",
                    {{"constant", ""},
                     {"log10 K", "", 2},
                     {"spread", "", 2},
                     {"T", "degC", 1},
                     {"I", "mol/kg"},
                     {"enthalpy", "kJ/mol", 1},
                     {"reaction", ""},
                     {"evidence", ""},
                     {"source", ""}},
                    {},
                    ""};
  std::map<std::string, std::string> sources;  // short name and citation
  for (std::size_t k = 0; k < view.size("constant"); ++k) {
    const std::string cited = view.text("constant_key", k);
    table.rows.push_back({view.labels("constant")[k], view.at("constant_log10_k", {k}), view.at("constant_spread", {k}),
                          view.at("constant_temperature", {k}) - zero_celsius, view.at("constant_ionic_strength", {k}),
                          view.at("constant_enthalpy", {k}) / 1000, view.text("constant_reaction", k), view.text("constant_evidence", k),
                          cited.empty() ? view.text("constant_source", k) : cited});
    if (!cited.empty()) sources[cited] = view.text("constant_source", k);
  }
  table.note = "spread: half-width of published values, in decades. A dash under enthalpy: none is known, the constant is used as measured.";
  page.table({table, true, true, {}, 100000, true});
  if (sources.empty()) return;
  page.heading("Sources");
  std::string list = "<dl class=\"sources\">\n";
  for (const auto& [key, citation] : sources) list += "<div><dt>" + escaped(key) + "</dt><dd>" + escaped(citation) + "</dd></div>\n";
  page.html(list + "</dl>\n");
}

void add_facts(PageBuilder& page, const ResultView& view, TableShelf& shelf) {
  page.section("solver", "Solver and program");
  shelf.take(page, "closure");
  ResultTable table{"facts", "", {{"fact", ""}, {"value", ""}}, {}, ""};
  const auto count = [&](const char* name, const char* meaning) {
    const Variable* variable = find_variable(view.results(), name);
    if (variable && variable->values.size() == 1 && std::isfinite(variable->values[0]))
      table.rows.push_back({meaning, fmt::format("{:.0f}", variable->values[0])});
  };
  count("newton_iterations", "iterations of the whole-circuit steady solve");
  count("time_steps", "steps of the integration through time");
  count("rate_evaluations", "evaluations of the rates through time");
  const auto said = [&](const char* name, const char* meaning) {
    if (const std::string text = view.attribute(name); !text.empty()) table.rows.push_back({meaning, text});
  };
  said("leat_mode", "solved");
  said("leat_activity_model", "activity model");
  said("leat_pregnant_liquor", "recovery is read in");
  said("source", "program");
  said("history", "made by");
  said("leat_format_version", "version of the results format");
  page.table({table, false, false, {}, most_rows});
}

void add_input(PageBuilder& page, const ResultView& view) {
  const std::string text = view.text("input_text");
  if (text.empty()) return;
  page.section("input", "Input");
  page.paragraph("The whole text of " + view.attribute("leat_input_file") + ": the case can be run again from it alone.");
  page.html("<pre class=\"copy\" tabindex=\"0\">" + escaped(text) + "</pre>\n");
}

void add_ending(PageBuilder& page, const ResultView& view, TableShelf& shelf) {
  shelf.drop("constants");
  add_constants(page, view);
  add_facts(page, view, shelf);
  shelf.take_rest(page);
  add_input(page, view);
}

PageBuilder::Head head_of(const ResultView& view, std::string kind, const std::string& about) {
  return {view.attribute("title"), std::move(kind), view.attribute("source"), about};
}

bool of_interest(const ResultView& view, std::size_t component) {
  const std::string role = view.text("component_role", component);
  return role == "metal" || role == "ligand";
}

bool is_metal(const ResultView& view, std::size_t component) { return view.text("component_role", component) == "metal"; }

ChartAxis ph_axis(const std::vector<ChartSeries>& series) {
  ChartAxis axis{"pH", ""};
  axis.fit = true;
  double low = INFINITY, high = -INFINITY;
  for (const ChartSeries& one : series)
    for (double value : one.values)
      if (std::isfinite(value) && !one.right) low = std::min(low, value), high = std::max(high, value);
  if (low > high) return axis;
  const double span = high - low, grain = span > 6 ? 2 : span > 2.5 ? 1 : 0.5;
  axis.min = grain * std::floor(low / grain);
  axis.max = std::max(grain * std::ceil(high / grain), *axis.min + grain);
  axis.step = *axis.max - *axis.min > 1.2 ? grain : 0.1 * std::round(20 * (*axis.max - *axis.min) / 10);
  return axis;
}

std::vector<ChartView> sharing_views(const ResultView& view, std::size_t places, const std::function<double(std::size_t, std::size_t)>& amount,
                                     const std::function<bool(std::size_t)>& wanted, std::size_t most) {
  constexpr double least_share = 0.001;
  std::vector<ChartView> views;
  const std::vector<std::string>& species = view.labels("species");
  for (std::size_t c = 0; c < view.size("component"); ++c) {
    if (!wanted(c)) continue;
    std::vector<double> total(places, 0.0);
    std::vector<std::pair<double, std::size_t>> ranked;  // largest share, species
    const auto held = [&](std::size_t p, std::size_t s) {
      const double content = view.at("species_content", {s, c});
      return content > 0 ? content * std::max(0.0, amount(p, s)) : 0.0;
    };
    for (std::size_t p = 0; p < places; ++p)
      for (std::size_t s = 0; s < species.size(); ++s)
        if (const double here = held(p, s); std::isfinite(here)) total[p] += here;
    for (std::size_t s = 0; s < species.size(); ++s) {
      double largest = 0;
      for (std::size_t p = 0; p < places; ++p)
        if (total[p] > 0) largest = std::max(largest, held(p, s) / total[p]);
      if (largest >= least_share) ranked.emplace_back(-largest, s);
    }
    if (ranked.empty()) continue;
    std::sort(ranked.begin(), ranked.end());
    if (ranked.size() > most) ranked.resize(most - 1);
    ChartView made{
        view.labels("component")[c], {fmt::format("share of dissolved {}, %", view.labels("component")[c]), "%", false, false, 0.0, 100.0}, {}, {}};
    std::vector<double> rest(places, 100.0);
    for (const auto& [share, s] : ranked) {
      ChartSeries series{species[s], {}};
      for (std::size_t p = 0; p < places; ++p) {
        series.values.push_back(total[p] > 0 ? 100 * held(p, s) / total[p] : std::nan(""));
        rest[p] -= std::isfinite(series.values.back()) ? series.values.back() : 100.0;
      }
      made.series.push_back(std::move(series));
    }
    for (double& value : rest) value = std::max(0.0, value);
    if (*std::max_element(rest.begin(), rest.end()) >= 100 * least_share) made.series.push_back({"all others", rest, -1, "rest-lost"});
    views.push_back(std::move(made));
  }
  return views;
}

}  // namespace leat
