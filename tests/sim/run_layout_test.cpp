// What a results file holds of a run is enough to draw the circuit and to weigh its metals, and it adds up.
#include <gtest/gtest.h>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <sstream>

#include "sim/results/result_access.hpp"
#include "sim/results/run_layout.hpp"
#include "tests/support/case.hpp"

namespace leat {
namespace {

std::string example(const std::string& name) {
  std::ifstream in(std::filesystem::path(__FILE__).parent_path() / ".." / ".." / "flowsheets" / name);
  std::stringstream text;
  text << in.rdbuf();
  return text.str();
}

ResultSet laid_out(const std::string& name, bool through_time) {
  const std::string text = example(name);
  const test::Case built = test::build(text);
  RunOptions options;
  options.through_time = through_time;
  const RunResult result = built.run(options);
  EXPECT_TRUE(result.steady_ok) << result.failure;
  return layout_of(result, *built.built.library, {name, text, built.flowsheet.title, "leat"});
}

class RunLayout : public testing::TestWithParam<const char*> {};

// At steady state every metal that enters a unit, or the circuit, leaves it: dissolved, undissolved or formed.
TEST_P(RunLayout, MetalsAddUpAroundEveryUnit) {
  const ResultSet set = laid_out(GetParam(), false);
  check_result_set(set);
  const std::vector<std::string>& from = find_texts(set, "stream_from")->values;
  const std::vector<std::string>& to = find_texts(set, "stream_to")->values;
  const std::size_t elements = axis_size(set, "element");
  const auto metal = [&](std::size_t stream, std::size_t element) {
    double sum = 0;
    for (const char* kind : {"steady_stream_metal_dissolved", "steady_stream_metal_undissolved", "steady_stream_metal_formed"})
      sum += find_variable(set, kind)->values[stream * elements + element];
    return sum;
  };
  std::vector<std::string> places = find_axis(set, "operation")->labels;
  places.push_back("");  // the outside
  for (const std::string& place : places)
    for (std::size_t e = 0; e < elements; ++e) {
      double in = 0, out = 0;
      for (std::size_t s = 0; s < from.size(); ++s) {
        if (from[s] == place) out += metal(s, e);
        if (to[s] == place) in += metal(s, e);
      }
      EXPECT_NEAR(in, out, 1e-9 * out) << place << " " << find_axis(set, "element")->labels[e];
    }
  for (std::size_t e = 0; e < elements; ++e) {
    double fed = 0;
    for (std::size_t s = 0; s < from.size(); ++s)
      if (from[s].empty()) fed += find_variable(set, "steady_stream_metal_undissolved")->values[s * elements + e];
    EXPECT_NEAR(fed, find_variable(set, "fed")->values[e], 1e-12 * fed);
  }
}

// Charges of species are those of the components they hold; a component holds one of itself.
TEST_P(RunLayout, SpeciesContentBalancesCharge) {
  const ResultSet set = laid_out(GetParam(), false);
  const Variable& content = *find_variable(set, "species_content");
  const Variable& charge = *find_variable(set, "species_charge");
  const std::size_t components = axis_size(set, "component"), species = axis_size(set, "species");
  // The free components stand first, in order.
  for (std::size_t i = 0; i < species; ++i) {
    double sum = 0;
    for (std::size_t j = 0; j + 1 < components; ++j) sum += content.values[i * components + j] * charge.values[j];
    EXPECT_NEAR(sum, charge.values[i], 1e-12) << find_axis(set, "species")->labels[i];
    if (i + 1 < components) {
      EXPECT_EQ(content.values[i * components + i], 1.0);
    }
  }
}

// A variable over time has a twin at rest; without a history the only row is that twin.
TEST_P(RunLayout, TwinsAreTheOnlyRowOfASteadyRun) {
  const ResultSet set = laid_out(GetParam(), false);
  int twins = 0;
  for (const Variable& one : set.variables) {
    if (one.axes.empty() || one.axes.front() != "time" || one.name == "held_in_vessels" || one.name.ends_with("_to_date")) continue;
    const Variable* twin = find_variable(set, "steady_" + one.name);
    ASSERT_NE(twin, nullptr) << one.name;
    ASSERT_EQ(twin->values.size(), one.values.size());
    for (std::size_t k = 0; k < one.values.size(); ++k)
      EXPECT_TRUE(twin->values[k] == one.values[k] || (std::isnan(twin->values[k]) && std::isnan(one.values[k]))) << one.name;
    ++twins;
  }
  EXPECT_GT(twins, 40);
  EXPECT_EQ(find_texts(set, "failure")->values.front(), "");
}

INSTANTIATE_TEST_SUITE_P(Examples, RunLayout, testing::Values("1_ammine_residue.yaml", "2_cyano_ore.yaml", "3_chloro_residue.yaml"),
                         [](const auto& one) { return std::string(one.param).substr(2, 4) == "ammi" ? "ammine" : std::string(one.param).substr(2, 4) == "cyan" ? "cyano" : "chloro"; });

}  // namespace
}  // namespace leat
