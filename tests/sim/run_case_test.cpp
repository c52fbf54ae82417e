// Whole cases from text: what a run does where a liquor lacks something, and what an analysis keeps.
#include <gtest/gtest.h>

#include <algorithm>

#include "tests/support/case.hpp"

namespace leat {
namespace {

const std::string ore = R"(leat: 1
kind: flowsheet
site: {altitude: 0 m, air_temperature: 20 degC}
chemistry: {families: [cyano, hydroxo], activity: davies}
solids: {ore: {phases: {gold: 2 g/t, silver: 20 g/t, quartz: rest}, inert: [quartz]}}
leaching:
  gold: {law: first_order, constant: 0.2 1/h, oxidant: O2}
  silver: {law: first_order, constant: 0.2 1/h, oxidant: O2, orders: {O2: 0.3}, at: {O2: 6 mg/L}}
streams:
  ore: {solids: ore, liquor: {NaCN: 500 mg/L}, solids_fraction: 45 %, rate: 10 t/h, rate_basis: dry}
AIRcircuit:
  L: {unit: train, tanks: 2, volume: 50 m3, temperature: 20 degC, takes: oreGAS}
  T: {unit: thickener, takes: L, solids_fraction: 55 %}
leaves: {pregnant: T.overflow, tails: T.underflow}
pregnant_liquor: pregnant
)";

std::string with(std::string text, const std::string& piece, const std::string& other) {
  text.replace(text.find(piece), piece.size(), other);
  return text;
}

// Metals that need an electron acceptor stay where they are when nothing brings one; with air they dissolve.
TEST(RunCase, NothingDissolvesWithoutItsOxidant) {
  const RunResult none = test::run(with(with(ore, "AIR", ""), "GAS", ""));
  ASSERT_TRUE(none.steady_ok) << none.failure;
  for (double extraction : none.steady.extraction_now) EXPECT_NEAR(extraction, 0, 1e-9);
  const RunResult aired = test::run(with(with(ore, "AIR", "  air: {gas: air}\n"), "GAS", ", gas: {takes: air, kla: 6 1/h}"));
  ASSERT_TRUE(aired.steady_ok) << aired.failure;
  for (double extraction : aired.steady.extraction_now) EXPECT_GT(extraction, 0.4);
}

// An analysis with a pH is of what is dissolved: no solid takes calcium out of it before it is used, although the water is
// supersaturated with calcite. 180 mg/L Ca is 4.491 mmol/L (Ca 40.078 g/mol).
TEST(RunCase, AnAnalysisKeepsWhatWasTyped) {
  const RunResult result = test::run(R"(leat: 1
kind: flowsheet
site: {altitude: 0 m, air_temperature: 18 degC}
chemistry: {activity: davies, may_form: [calcite]}
streams:
  water: {liquor: {ions: {Ca: 180 mg/L, Mg: 60 mg/L, Na: 90 mg/L, Cl: 140 mg/L, SO4: 520 mg/L, HCO3: 160 mg/L}, pH: 7.6, balance_with: Na}, rate: 1 m3/h}
circuit: {L: {unit: tank, volume: 1 m3, temperature: 18 degC, takes: water}}
leaves: {out: L}
pregnant_liquor: out
)");
  ASSERT_TRUE(result.steady_ok) << result.failure;
  const Circuit& circuit = *result.circuit;
  const CircuitStream& water = circuit.streams[circuit.find_stream("water")];
  EXPECT_NEAR(3600 * water.feed[circuit.chemistry->find_component("Ca^2+")], 4.4912, 1e-3);
  // In the tank calcite does form.
  EXPECT_GT(result.steady.units[0].formed[circuit.chemistry->find_phase("calcite")], 0);
}

// Cautions name the worst place, and cyanide at low pH is one of its own.
TEST(RunCase, CyanideAtLowPhIsACautionOfItsOwn) {
  const RunResult result = test::run(with(with(with(ore, "AIR", ""), "GAS", ""), "{NaCN: 500 mg/L}", "{NaCN: 500 mg/L, HCl: 0.008 mol/L}"));
  ASSERT_TRUE(result.steady_ok) << result.failure;
  const auto of = [&](const std::string& kind) {
    return std::count_if(result.cautions.begin(), result.cautions.end(), [&](const Caution& one) { return one.kind == kind; });
  };
  EXPECT_GT(of("cyanide at low pH"), 0);
  EXPECT_GT(of("hydrogen cyanide"), 0);
  EXPECT_GT(of("cyanide effluent"), 0);
}

}  // namespace
}  // namespace leat
