// The tables people read: they carry the file's numbers in the units of their heads, of the steady state where there is one.
#include "sim/results/result_tables.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "sim/results/result_access.hpp"
#include "sim/results/run_layout.hpp"
#include "tests/support/case.hpp"

namespace leat {
namespace {

const double nan = std::nan("");

// Invented: two aerated tanks and a thickener.
const std::string ore = R"(leat: 1
kind: flowsheet
title: Two tanks (invented)
site: {altitude: 0 m, air_temperature: 20 degC}
chemistry: {families: [cyano, hydroxo], activity: davies}
solids: {ore: {phases: {gold: 2 g/t, silver: 20 g/t, quartz: rest}, inert: [quartz]}}
leaching:
  gold: {law: first_order, constant: 0.2 1/h, oxidant: O2}
  silver: {law: first_order, constant: 0.2 1/h, oxidant: O2}
reagents: {cyanide: {made_of: {NaCN: 30 %, water: rest}, counted_as: NaCN}}
streams:
  ore: {solids: ore, liquor: {NaOH: 0.01 mol/L}, solids_fraction: 45 %, rate: 10 t/h, rate_basis: dry}
  cyanide: {reagent: cyanide, rate: 30 kg/h}
  air: {gas: air}
circuit:
  L: {unit: train, tanks: 2, volume: 50 m3, temperature: 20 degC, takes: [ore, cyanide], gas: {takes: air, kla: 6 1/h}}
  T: {unit: thickener, takes: L, solids_fraction: 55 %}
leaves: {pregnant: T.overflow, tails: T.underflow}
pregnant_liquor: pregnant
metals: [Au, Ag]
)";
const std::string history = "history: {start: water, until: 30 h, every: 1 h}\n";

ResultSet results_of(const std::string& text) {
  const test::Case made = test::build(text);
  const RunResult result = made.run();
  EXPECT_TRUE(result.steady_ok) << result.failure;
  return layout_of(result, *made.built.library, {"tables.yaml", text, "Two tanks (invented)", "leat test"});
}

const ResultTable& table(const std::vector<ResultTable>& tables, const std::string& name) {
  const auto found = std::find_if(tables.begin(), tables.end(), [&](const ResultTable& one) { return one.name == name; });
  if (found == tables.end()) throw std::out_of_range(name);
  return *found;
}

std::size_t column(const ResultTable& table, const std::string& header, const std::string& unit) {
  for (std::size_t i = 0; i < table.columns.size(); ++i)
    if (table.columns[i].header == header && table.columns[i].unit == unit) return i;
  throw std::out_of_range(header + " [" + unit + "]");
}

// The number in the row that begins with these texts.
double number(const ResultTable& table, const std::vector<std::string>& labels, const std::string& header, const std::string& unit) {
  for (const auto& row : table.rows) {
    bool meant = true;
    for (std::size_t i = 0; i < labels.size(); ++i) meant = meant && std::get<std::string>(row[i]) == labels[i];
    if (meant) return std::get<double>(row[column(table, header, unit)]);
  }
  throw std::out_of_range(labels.front());
}

// A steady number of the file, by labels.
double steady(const ResultSet& results, const std::string& name, const std::vector<std::string>& labels) {
  const Variable* variable = find_variable(results, "steady_" + name);
  if (!variable) throw std::out_of_range(name);
  std::size_t place = 0;
  for (std::size_t i = 0; i < labels.size(); ++i) {
    const Axis& axis = *find_axis(results, variable->axes[i]);
    place = place * axis.size() + static_cast<std::size_t>(std::find(axis.labels.begin(), axis.labels.end(), labels[i]) - axis.labels.begin());
  }
  return variable->values.at(place);
}

void expect_whole(const std::vector<ResultTable>& tables, const std::string& kind) {
  std::vector<std::string> names;
  for (const ResultTable& one : tables) {
    names.push_back(one.name);
    EXPECT_FALSE(one.columns.empty()) << one.name;
    for (const auto& row : one.rows) EXPECT_EQ(row.size(), one.columns.size()) << one.name;
  }
  EXPECT_EQ(names, table_names(kind));
}

TEST(ResultTables, ARunShowsItsSteadyState) {
  const ResultSet results = results_of(ore + history);
  const std::vector<ResultTable> tables = tables_of(results);
  expect_whole(tables, "run");

  const ResultTable& streams = table(tables, "streams");
  EXPECT_EQ(streams.heading, "Streams at steady state (metals dissolved in the liquor)");
  EXPECT_EQ(streams.rows.size(), axis_size(results, "stream"));
  const double liquor = steady(results, "stream_liquor_flow", {"T.overflow"});  // m3/s
  EXPECT_NEAR(number(streams, {"T.overflow"}, "liquor", "m3/h"), 3600 * liquor, 1e-12);
  EXPECT_NEAR(number(streams, {"T.overflow"}, "Ag", "mg/L"), 1e3 * steady(results, "stream_metal_dissolved", {"T.overflow", "Ag"}) / liquor, 1e-9);
  EXPECT_NEAR(number(streams, {"T.underflow"}, "solids", "%"), 55, 1e-9);
  EXPECT_NEAR(number(streams, {"ore"}, "solids", "t/h"), 10, 1e-9);
  const auto row = std::find_if(streams.rows.begin(), streams.rows.end(), [](const auto& one) { return std::get<std::string>(one[0]) == "T.overflow"; });
  EXPECT_EQ(std::get<std::string>((*row)[1]), "T");
  EXPECT_EQ(std::get<std::string>((*row)[2]), "> pregnant");

  const ResultTable& stages = table(tables, "stages");
  EXPECT_NEAR(number(stages, {"L.1"}, "volume", "m3"), 50, 1e-9);
  EXPECT_NEAR(number(stages, {"L.1"}, "T", "degC"), 20, 1e-9);
  EXPECT_EQ(number(stages, {"L.2"}, "pH", ""), steady(results, "ph", {"L.2"}));
  EXPECT_NEAR(number(stages, {"L.2"}, "Au left", "%"), 100 * (1 - steady(results, "extraction", {"Au"})), 1e-9);

  const ResultTable& reagents = table(tables, "reagents");
  EXPECT_NEAR(number(reagents, {"cyanide", "NaCN"}, "rate", "kg/h"), 9, 1e-9);  // 30 % of 30 kg/h
  EXPECT_GT(number(reagents, {"from air, 2 vessels", "O2"}, "rate", "kg/h"), 0);
}

// What is fed of a metal is in the streams that leave, dissolved, formed or undissolved; what is dissolved in the pregnant
// liquor is its recovery.
TEST(ResultTables, MetalsGoSomewhere) {
  const ResultSet results = results_of(ore);
  const std::vector<ResultTable> tables = tables_of(results);
  const ResultTable& metals = table(tables, "metals");
  const ResultTable& recovery = table(tables, "recovery");
  for (const char* metal : {"Au", "Ag"}) {
    double all = 0;
    for (const char* form : {"dissolved", "formed", "undissolved"}) all += number(metals, {metal, "all"}, form, "%");
    EXPECT_NEAR(all, 100, 1e-6) << metal;
    EXPECT_NEAR(number(metals, {metal, "pregnant"}, "dissolved", "%"), 100 * steady(results, "recovery", {metal}), 1e-9);
    EXPECT_NEAR(number(recovery, {metal}, "recovery", "%"), 100 * steady(results, "recovery", {metal}), 1e-12);
    EXPECT_NEAR(number(metals, {metal, "all"}, "undissolved", "%"), 100 - number(recovery, {metal}, "extraction", "%"), 1e-9);
  }
  EXPECT_NEAR(number(recovery, {"Au"}, "fed", "kg/h"), 0.020, 1e-9);  // 2 g/t of 10 t/h
  EXPECT_TRUE(table(tables, "history").rows.empty());
  EXPECT_EQ(table(tables, "closure").rows.size(), 1u);
}

TEST(ResultTables, AllOfTheHistoryIsThere) {
  const ResultSet results = results_of(ore + history);
  const ResultTable through = table(tables_of(results), "history");
  ASSERT_EQ(through.rows.size(), 31u);
  EXPECT_EQ(through.terminal_rows, 13);
  const Variable& recovery = *find_variable(results, "recovery");
  const std::vector<std::string>& elements = find_axis(results, "element")->labels;
  const auto silver = static_cast<std::size_t>(std::find(elements.begin(), elements.end(), "Ag") - elements.begin());
  for (std::size_t k = 0; k < through.rows.size(); ++k) {
    EXPECT_NEAR(std::get<double>(through.rows[k][0]), static_cast<double>(k), 1e-9);
    EXPECT_EQ(std::get<double>(through.rows[k][column(through, "Ag recovery", "%")]), 100 * recovery.values[k * elements.size() + silver]);
  }
}

// Without a steady state the tables are of the last stored time, and say so.
TEST(ResultTables, WithoutASteadyStateTheLastStoredTimeIsShown) {
  ResultSet results = results_of(ore + history);
  std::erase_if(results.variables, [](const Variable& one) { return one.name.starts_with("steady_"); });
  const std::vector<ResultTable> tables = tables_of(results);
  expect_whole(tables, "run");
  EXPECT_EQ(table(tables, "streams").heading, "Streams at 30.00 h, no steady state found (metals dissolved in the liquor)");
  const Variable& ph = *find_variable(results, "ph");
  EXPECT_EQ(number(table(tables, "stages"), {"L.2"}, "pH", ""), ph.values.back());
  EXPECT_EQ(table(tables, "closure").rows.size(), 1u);  // through time alone
}

ResultSet small_beaker() {
  ResultSet set;
  set.attributes = {{"leat_kind", "beaker"}};
  set.axes = {{"step", "", "1", {}, {1, 2}, false},
              {"species", "", "", {"Ag^+", "Ag(NH3)2^+", "NH3", "H^+"}, {}, false},
              {"component", "", "", {"Ag(I)", "NH3", "H", "H2O"}, {}, false},
              {"mineral", "", "", {"chlorargyrite"}, {}, false}};
  set.variables = {{"species_content", "", "1", {"species", "component"}, {1, 0, 0, 0, 1, 2, 0, 0, 0, 1, 0, 0, 0, 0, 1, 0}},
                   {"molality", "", "mol kg-1", {"step", "species"}, {0.1, 0.3, 1, 0, 0, 0.4, 1, 0}},
                   {"dissolved", "", "mol", {"step", "component"}, {0.2, 0.8, 0, 27.8, 0.2, 0.9, 0, 27.8}},
                   {"liquor_volume", "", "m3", {"step"}, {5e-4, 5e-4}},
                   {"formed", "", "mol", {"step", "mineral"}, {0.01, 0}},
                   {"mineral_mass", "", "kg mol-1", {"mineral"}, {0.14332}},
                   {"saturation_index", "", "1", {"step", "mineral"}, {0, -1.25}},
                   {"temperature", "", "K", {"step"}, {298.15, 298.15}},
                   {"dosed", "", "mol", {"step"}, {nan, 0.25}},
                   {"proton_added", "", "mol", {"step"}, {0, 0}}};
  set.flags = {{"may_form", "", {"mineral"}, {1}, {"watched", "may_form"}}};
  set.texts = {{"step_name", "", "step", {"first", "second"}}, {"dosed_compound", "", "step", {"", "H2SO4"}}, {"component_role", "", "component", {"metal", "ligand", "proton", "water"}}};
  return set;
}

TEST(ResultTables, ABeakerShowsWhoHoldsWhat) {
  const std::vector<ResultTable> tables = tables_of(small_beaker());
  expect_whole(tables, "beaker");
  EXPECT_NEAR(number(table(tables, "dissolved"), {"Ag(I)"}, "first", "mol/L"), 0.4, 1e-12);
  const ResultTable& holders = table(tables, "holders");
  EXPECT_NEAR(number(holders, {"Ag(I)", "Ag(NH3)2^+"}, "first", "%"), 75, 1e-9);
  EXPECT_NEAR(number(holders, {"NH3", "Ag(NH3)2^+"}, "first", "%"), 37.5, 1e-9);  // 0.6 of 1.6 mol/kg
  EXPECT_EQ(number(holders, {"Ag(I)", "Ag^+"}, "second", "%"), 0);
  const ResultTable& steps = table(tables, "steps");
  EXPECT_EQ(std::get<std::string>(steps.rows[0][column(steps, "solids", "")]), "chlorargyrite 1.433 g");
  EXPECT_EQ(std::get<std::string>(steps.rows[1][column(steps, "solids", "")]), "-");
  EXPECT_EQ(std::get<std::string>(steps.rows[1][column(steps, "dosed", "")]), "0.2500 mol H2SO4");
  EXPECT_NEAR(number(table(tables, "saturation"), {"chlorargyrite", "yes"}, "second", "log10"), -1.25, 1e-12);
}

ResultSet small_ladder() {
  ResultSet set;
  set.attributes = {{"leat_kind", "ladder"}, {"leat_stepped_path", "liquors.strong.NH3"}, {"leat_stepped_units", "mol/L"}};
  set.axes = {{"rung", "", "1", {}, {1, 2, 3}, false},
              {"species", "", "", {"Ag^+", "Ag(NH3)2^+"}, {}, false},
              {"component", "", "", {"Ag(I)", "NH3"}, {}, false},
              {"element", "", "", {"Ag"}, {}, false},
              {"mineral", "", "", {"chlorargyrite"}, {}, false},
              {"stream", "", "", {"ammonia"}, {}, false}};
  set.variables = {{"stepped", "", "mol/L", {"rung"}, {0.5, 1, 2}},
                   {"ph", "", "1", {"rung"}, {11, nan, 12}},
                   {"ionic_strength", "", "mol kg-1", {"rung"}, {0.1, nan, 0.2}},
                   {"dissolved", "", "mol m-3", {"rung", "component"}, {10, 500, nan, nan, 20, 2000}},
                   {"share", "", "1", {"rung", "component", "species"}, {0.0005, 0.9995, nan, nan, nan, nan, nan, nan, 0.0001, 0.9999, nan, nan}},
                   {"formed", "", "mol m-3", {"rung", "mineral"}, {5, nan, 0}},
                   {"recovery", "", "1", {"rung", "element"}, {0.8, nan, 0.9}},
                   {"reagent_consumption", "", "kg kg-1", {"rung", "stream"}, {nan, nan, nan}}};
  set.texts = {{"series", "", "rung", {"one", "one", "one"}},
               {"status", "", "rung", {"solved", "not_solved", "solved"}},
               {"reason", "", "rung", {"", "did not close", ""}},
               {"value_as_typed", "", "rung", {"0.5 mol/L", "1 mol/L", "2 mol/L"}}};
  return set;
}

TEST(ResultTables, ALadderShowsItsRungs) {
  const std::vector<ResultTable> tables = tables_of(small_ladder());
  expect_whole(tables, "ladder");
  const ResultTable& ladder = table(tables, "ladder");
  ASSERT_EQ(ladder.rows.size(), 3u);
  EXPECT_EQ(std::get<double>(ladder.rows[2][column(ladder, "liquors.strong.NH3", "mol/L")]), 2);
  EXPECT_EQ(std::get<double>(ladder.rows[2][column(ladder, "Ag(I)", "mmol/L")]), 20);
  EXPECT_EQ(std::get<double>(ladder.rows[0][column(ladder, "Ag recovery", "%")]), 80);
  EXPECT_TRUE(std::isnan(std::get<double>(ladder.rows[1][column(ladder, "pH", "")])));
  EXPECT_EQ(std::get<std::string>(ladder.rows[0].back()), "chlorargyrite");
  EXPECT_THROW(column(ladder, "ammonia", "kg/t solids"), std::out_of_range);  // a reagent of no rung
  const ResultTable& distribution = table(tables, "distribution");
  EXPECT_EQ(distribution.columns.size(), 3u);  // free silver stays below 0.1 %
  EXPECT_NEAR(std::get<double>(distribution.rows[2][column(distribution, "Ag(NH3)2^+", "% of Ag(I)")]), 99.99, 1e-12);
  const ResultTable& failures = table(tables, "failures");
  ASSERT_EQ(failures.rows.size(), 1u);
  EXPECT_EQ(std::get<double>(failures.rows[0][0]), 2);
  EXPECT_EQ(std::get<std::string>(failures.rows[0].back()), "did not close");
}

TEST(ResultTables, ALadderOfWordsShowsThemAsTyped) {
  ResultSet words = small_ladder();
  words.texts.back().values = {"ideal", "davies", "davies"};
  const ResultTable ladder = table(tables_of(words), "ladder");
  EXPECT_EQ(std::get<std::string>(ladder.rows[0][1]), "ideal");
}

TEST(ResultTables, AnotherKindHasNone) {
  ResultSet other;
  other.attributes = {{"leat_kind", "campaign"}};
  EXPECT_THROW(tables_of(other), std::logic_error);
  EXPECT_TRUE(table_names("nothing").empty());
}

}  // namespace
}  // namespace leat
