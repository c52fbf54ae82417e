// Rate laws and the reagents that dissolution takes, made by whole flowsheets.
#include <fmt/format.h>

#include <cmath>

#include "models/chemistry/stoichiometry.hpp"
#include "tests/support/case.hpp"
#include "tests/support/expect.hpp"
#include "tests/support/problem.hpp"

namespace leat {
namespace {

using test::content;
using test::flow;
using test::held;
using test::run;
using test::stream;
using test::unit;

constexpr double hour = 3600;  // [s]

constexpr const char* head = R"(leat: 1
kind: flowsheet
site: {air_temperature: 25 degC}
)";
constexpr const char* litre = "chemistry: {activity: ideal, density: one_kg_water_per_litre, may_form: []}\n";

double molar_mass(const std::string& compound) {  // [kg/mol]
  ComponentAmounts amounts;
  double mass = 0;
  std::string fault;
  EXPECT_TRUE(components_of(test::embedded_library(), compound, amounts, mass, fault)) << fault;
  return mass;
}

// Silver chloride far in excess in a molar chloride liquor: dc/dt = k (c_eq - c) with c_eq = 1e-6 mol/L from a solubility
// product of 1e-6, k by way of the 0.1 mol/L of solid there is. Relative 3e-5: a hundred-thousandth of it dissolves.
TEST(FirstOrderApproachToEquilibrium, Levenspiel_ThreeEqualTanks) {
  const double lot_share = 100 * 0.1433212 / 5560;  // m3 of solid per m3 of liquor
  const RunResult r = run(fmt::format(
      "{}chemistry:\n  activity: ideal\n  density: one_kg_water_per_litre\n  may_form: []\n  only: [OH^-, chlorargyrite]\n"
      "  constants: {{chlorargyrite: {{log10_solubility: -6, source: \"a round number\"}}}}\n"
      "solids: {{salt: {{phases: {{chlorargyrite: 100 %}}}}}}\n"
      "leaching: {{chlorargyrite: {{law: first_order, constant: {:.17g} 1/h, to: saturation}}}}\n"
      "streams:\n  liquor: {{liquor: {{NaCl: 1 mol/L}}, rate: 1 m3/h}}\n  solid: {{solids: salt, rate: 14.33212 kg/h, rate_basis: dry}}\n"
      "circuit: {{L: {{unit: train, tanks: 3, volume: {:.17g} m3, temperature: 25 degC, takes: [liquor, solid]}}}}\n"
      "leaves: {{out: L}}\npregnant_liquor: out\n",
      head, 0.25 * 1e-6 / 0.1, 4 * (1 + lot_share)));
  EXPECT_RELATIVE(held(r, r.steady, "L.3", "Ag^+") / 1e-3, 0.875, 3e-5);
  EXPECT_RELATIVE(held(r, r.steady, "L.1", "Ag^+") / 1e-3, 0.5, 3e-5);
}

// A tonne an hour of ore in aerated cyanide liquor, one tank long enough for all that can dissolve [g/t, mg/L, m3/t].
RunResult gold_leach(double gold, double oxygen, double liquor, double extraction) {
  return run(fmt::format("{}{}solids: {{ore: {{phases: {{gold: {} g/t, gangue: rest}}, inert: [gangue], gangue_density: 2.7 t/m3}}}}\n"
                         "leaching: {{gold: {{law: first_order, constant: 100 1/s, oxidant: O2, ultimate_extraction: {} %}}}}\n"
                         "streams:\n  ore: {{solids: ore, rate: 1 t/h, rate_basis: dry}}\n"
                         "  cyanide: {{liquor: {{NaCN: 1 g/L, NaOH: 1 g/L, O2: {} mg/L}}, rate: {} m3/h}}\n"
                         "circuit: {{L: {{unit: tank, volume: 20 m3, temperature: 25 degC, takes: [ore, cyanide]}}}}\n"
                         "leaves: {{out: L}}\npregnant_liquor: out\n",
                         head, litre, gold, 100 * extraction, oxygen, liquor));
}

// Relative 1e-4 as the source's rounding of atomic weights asks; what does not dissolve in ten hours is a ten-millionth.
void expect_oxygen(double gold, double oxygen, double liquor, double needed, double available, double ratio) {
  const RunResult r = gold_leach(gold, oxygen, liquor, 0.95);
  const double per_tonne = molar_mass("O2") * 1000 * hour;  // g/t of a mol/s
  const double fed = flow(r, r.steady, "cyanide", "O2") * per_tonne, used = fed - flow(r, r.steady, "L", "O2") * per_tonne;
  EXPECT_RELATIVE(used, needed, 1e-4);
  EXPECT_RELATIVE(fed, available, 1e-9);
  EXPECT_RELATIVE(fed / used, ratio, 1e-4);
}

TEST(GoldByOxygen, Elsner_OxygenForThreeGramsATonne) { expect_oxygen(3, 8, 1.5, 0.115748449, 12, 103.673095); }
TEST(GoldByOxygen, Elsner_OxygenForTwelveGramsATonne) { expect_oxygen(12, 20, 2, 0.462993796, 40, 86.3942461); }

// 4 Au + 8 CN- + O2 + 2 H2O = 4 Au(CN)2- + 4 OH-. Relative 1e-4 for atomic weights; other cyanides of gold are under that.
TEST(GoldByOxygen, Elsner_ReagentsPerGram) {
  const RunResult r = gold_leach(3, 8, 1.5, 1);
  const Chemistry& c = *r.circuit->chemistry;
  const UnitSnapshot& tank = unit(r, r.steady, "L");
  const int gold = test::component_of(r, "Au^+"), cyanide = test::component_of(r, "CN^-");
  double bound = 0, dissolved = 0;
  for (std::size_t i = 0; i < c.species.size(); ++i) {
    double metal = 0, ligand = 0;
    for (const Share& share : c.species[i].shares) {
      if (share.component == gold) metal = share.coefficient;
      if (share.component == cyanide) ligand = share.coefficient;
    }
    dissolved += metal * tank.molality[i];
    if (metal != 0) bound += ligand * tank.molality[i];
  }
  const Lot& lot = r.circuit->context->lots[test::lot_of(r, "gold")];
  const double ligands = bound / dissolved, gram = lot.molar_mass;
  EXPECT_RELATIVE(ligands * molar_mass("NaCN") / gram, 0.497625257, 1e-4);
  EXPECT_RELATIVE(ligands * molar_mass("KCN") / gram, 0.661191389, 1e-4);
  EXPECT_RELATIVE(ligands * molar_mass("CN^-") / gram, 0.264186963, 1e-4);
  EXPECT_RELATIVE(-lot.products[test::component_of(r, "O2")] * molar_mass("O2") / gram, 0.0406134909, 1e-4);
  EXPECT_NEAR(lot.products[c.hydrogen], -1, 1e-12);  // one OH- per gold
  EXPECT_NEAR(lot.products[c.water()], 0.5, 1e-12);
}

// A trace of salt in each of two tanks that share nothing but the law [degC].
RunResult two_tanks(const std::string& law, double warm, const std::string& one = "water", const std::string& two = "water") {
  return run(fmt::format("{}{}solids: {{ore: {{phases: {{halite: 1 g/t, gangue: rest}}, inert: [gangue], gangue_density: 2.7 t/m3}}}}\n"
                         "leaching: {{halite: {}}}\n"
                         "streams:\n  a: {{solids: ore, liquor: {}, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}}\n"
                         "  b: {{solids: ore, liquor: {}, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}}\n"
                         "circuit:\n  A: {{unit: tank, volume: 5 m3, temperature: 25 degC, takes: a}}\n"
                         "  B: {{unit: tank, volume: 5 m3, temperature: {} degC, takes: b}}\n"
                         "leaves: {{out: A, other: B}}\npregnant_liquor: out\n",
                         head, litre, law, one, two, warm));
}
double speed(const RunResult& r, const std::string& tank) { return unit(r, r.steady, tank).clock_speed[test::lot_of(r, "halite")]; }

// Relative 1e-4 as printed: the gas constant of the source has fewer digits.
TEST(Arrhenius, RiveraBingolLiuGhosh_RatioBetween35And25Degrees) {
  const double energy[] = {4.5, 15.0, 26.75, 44.3}, expected[] = {1.06067867, 1.21696882, 1.41932447, 1.78590621};
  for (int k = 0; k < 4; ++k) {
    const RunResult r =
        two_tanks(fmt::format("{{law: first_order, constant: 0.5 1/h, activation_energy: {} kJ/mol, at: {{temperature: 25 degC}}}}", energy[k]), 35);
    EXPECT_RELATIVE(speed(r, "A") * hour, 0.5, 1e-12);
    EXPECT_RELATIVE(speed(r, "B") / speed(r, "A"), expected[k], 1e-4);
  }
}

// Power-law kinetics, Levenspiel chapter 3: at the reference the constant, at four times it 4^n. Relative 1e-5: the ore's own
// salt is a millionth of the liquor's.
TEST(Orders, Levenspiel_PowerLaw) {
  for (double order : {0.5, 1.0, 2.0, -0.5}) {
    const RunResult r = two_tanks(fmt::format("{{law: first_order, constant: 0.5 1/h, orders: {{Cl: {}}}, at: {{Cl: 1 mol/L}}}}", order), 25,
                                  "{NaCl: 1 mol/L}", "{NaCl: 4 mol/L}");
    EXPECT_RELATIVE(speed(r, "A") * hour, 0.5, 1e-5);
    EXPECT_RELATIVE(speed(r, "B") / speed(r, "A"), std::pow(4, order), 1e-5);
  }
}

// One tank of first order keeps 1/(1 + t/within) of a lot. Relative 1e-6: the solids' volume changes by a millionth.
TEST(AtOnce, Levenspiel_OneStirredTank) {
  const RunResult r = two_tanks("{law: at_once, within: 20 s}", 25);
  const double residence = 5 / stream(r, r.steady, "a").pulp_volume;
  EXPECT_RELATIVE(test::lot_flow(r, r.steady, "A", "halite") / test::lot_flow(r, r.steady, "a", "halite"), 1 / (1 + residence / 20), 1e-6);
}

// Silver over silver chloride in water by its solubility product, 10^-9.74 in Harris, Quantitative Chemical Analysis: 1.35e-5
// mol/L of the free ion. Relative 2 %: the library's 10^-9.75 is 1 % lower, the dissolved molecule AgCl takes half a percent.
TEST(ToSaturation, Harris_SilverChlorideInWater) {
  const RunResult r = run(fmt::format("{}{}solids: {{salt: {{phases: {{chlorargyrite: 1 %, gangue: rest}}, inert: [gangue], gangue_density: 2.7 t/m3}}}}\n"
                                      "leaching: {{chlorargyrite: {{law: first_order, constant: 100 1/h, to: saturation}}}}\n"
                                      "streams: {{pulp: {{solids: salt, liquor: water, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}}}}\n"
                                      "circuit: {{L: {{unit: tank, volume: 100 m3, temperature: 25 degC, takes: pulp}}}}\n"
                                      "leaves: {{out: L}}\npregnant_liquor: out\n",
                                      head, litre));
  EXPECT_RELATIVE(unit(r, r.steady, "L").molality[r.circuit->chemistry->find_species("Ag^+")], 1.35e-5, 0.02);
}

}  // namespace
}  // namespace leat
