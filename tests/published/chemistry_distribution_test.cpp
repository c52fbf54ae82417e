// How a metal is shared among its complexes, and a ligand among metals, against closed forms with published constants.
//
// As in chemistry_test.cpp: per litre with one kilogram of solvent in it, 25 degC, all activity coefficients one.
// Tolerance everywhere 1e-6 (1e-5 on traces), as the expected values are exact; absolute 1e-12 for shares near zero.
#include "tests/support/expect.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

struct Distribution {
  double ligand;               // free [mol/L]
  std::vector<double> shares;  // of the bare metal and of each complex [1]
  double bound;                // ligands per metal [1]
};

struct Ladder {
  std::string metal, ligand;
  std::vector<std::string> complexes;
  std::vector<double> log10_stepwise;
};

// At held free ligand, then again closed with the total that this took: both must have the same distribution.
void expect_distribution(const Ladder& ladder, const std::vector<Distribution>& points, double absolute) {
  for (const Distribution& point : points) {
    Problem held;
    held.steps(ladder.metal, ladder.ligand, ladder.complexes, ladder.log10_stepwise);
    Problem closed = held;
    held.feed(ladder.metal, 0.01).hold(ladder.ligand, point.ligand);
    const Answer open = held.solve();
    const double taken = -open.exchanged(ladder.ligand);  // [mol]
    EXPECT_RELATIVE(taken, point.ligand + 0.01 * point.bound, 1e-6);
    closed.feed(ladder.metal, 0.01).feed(ladder.ligand, taken);
    for (const Answer& answer : {open, closed.solve()}) {
      EXPECT_RELATIVE(answer.molality(ladder.ligand), point.ligand, 1e-6);
      EXPECT_NEAR(answer.share(ladder.metal, ladder.metal), point.shares[0], 1e-6 * point.shares[0] + absolute);
      for (std::size_t k = 0; k < ladder.complexes.size(); ++k)
        EXPECT_NEAR(answer.share(ladder.complexes[k], ladder.metal), point.shares[k + 1], 1e-6 * point.shares[k + 1] + absolute)
            << ladder.complexes[k] << " at " << point.ligand;
      EXPECT_RELATIVE(answer.per_metal(ladder.ligand, ladder.metal), point.bound, 1e-6);
    }
  }
}

const std::vector<std::string> copper_ammines = {"Cu(NH3)^2+", "Cu(NH3)2^2+", "Cu(NH3)3^2+", "Cu(NH3)4^2+"};
const std::vector<std::string> zinc_ammines = {"Zn(NH3)^2+", "Zn(NH3)2^2+", "Zn(NH3)3^2+", "Zn(NH3)4^2+"};
const std::vector<std::string> silver_ammines = {"Ag(NH3)^+", "Ag(NH3)2^+"};

// Bjerrum, Metal Ammine Formation in Aqueous Solution, 1941 (2 mol/L NH4NO3); constants from memory.
TEST(bjerrum_1941, copper_ammines) {
  expect_distribution({"Cu^2+", "NH3", copper_ammines, {4.15, 3.5, 2.89, 2.13}},
                      {{1e-4, {0.345499218, 0.488030617, 0.154328832, 0.0119797311, 0.000161602126}, 0.833273882},
                       {1e-3, {0.0100862606, 0.142472218, 0.450536712, 0.349727824, 0.0471769853}, 2.28143706},
                       {1e-2, {1.16203012e-05, 0.00164141118, 0.051905979, 0.402918665, 0.543522324}, 3.48829866}},
                      1e-12);
}

// Bjerrum 1941, as above.
TEST(bjerrum_1941, nickel_ammines) {
  expect_distribution({"Ni^2+", "NH3", {"Ni(NH3)^2+", "Ni(NH3)2^2+", "Ni(NH3)3^2+", "Ni(NH3)4^2+", "Ni(NH3)5^2+", "Ni(NH3)6^2+"},
                       {2.8, 2.24, 1.73, 1.19, 0.75, 0.03}},
                      {{0.01, {0.0397983996, 0.251110926, 0.436380775, 0.234350351, 0.0362965719, 0.00204110623, 2.18708473e-05}, 1.98244657},
                       {0.1, {4.57723018e-05, 0.002888037, 0.0501883309, 0.269527295, 0.417448354, 0.23474846, 0.0251537507}, 3.9063048}},
                      1e-12);
}

// Bjerrum 1941, as above.
TEST(bjerrum_1941, zinc_ammines) {
  expect_distribution({"Zn^2+", "NH3", zinc_ammines, {2.37, 2.44, 2.5, 2.15}},
                      {{0.001, {0.756263917, 0.177285567, 0.0488284996, 0.0154409274, 0.00218108896}, 0.329989704},
                       {0.01, {0.0169323735, 0.039693358, 0.109324586, 0.345714696, 0.488334987}, 3.24882656}},
                      1e-12);
}

// Bjerrum 1941, as above.
TEST(bjerrum_1941, cadmium_ammines) {
  expect_distribution({"Cd^2+", "NH3", {"Cd(NH3)^2+", "Cd(NH3)2^2+", "Cd(NH3)3^2+", "Cd(NH3)4^2+"}, {2.65, 2.1, 1.44, 0.93}},
                      {{0.01, {0.0783030693, 0.349766963, 0.440330518, 0.121277095, 0.0103223549}, 1.6355487},
                       {0.1, {0.000287762908, 0.0128538969, 0.161820975, 0.445691973, 0.379345392}, 3.19095333}},
                      1e-12);
}

// Bjerrum 1941, as above.
TEST(bjerrum_1941, silver_ammines) {
  expect_distribution({"Ag^+", "NH3", silver_ammines, {3.2, 3.83}},
                      {{0.0001, {0.790113312, 0.125224521, 0.0846621667}, 0.294548854}, {0.001, {0.0751874824, 0.119164129, 0.805648389}, 1.73046091}},
                      1e-12);
}

// Sharpe, The Chemistry of Cyano Complexes of the Transition Metals, 1976; Smith and Martell, Critical Stability Constants 4,
// 1976; constants from memory.
TEST(sharpe_1976, cadmium_cyanides) {
  expect_distribution({"Cd^2+", "CN^-", {"Cd(CN)^+", "Cd(CN)2(aq)", "Cd(CN)3^-", "Cd(CN)4^2-"}, {5.48, 5.14, 4.56, 3.58}},
                      {{1e-5, {0.102461633, 0.309429184, 0.427131176, 0.155081956, 0.00589605154}, 1.65252161},
                       {1e-3, {1.36799831e-07, 4.13128885e-05, 0.00570276612, 0.207054923, 0.787200861}, 3.78141506}},
                      1e-14);
}

// Overall constants as used in cyanidation texts, from memory.
TEST(cyanidation_texts, copper_cyanides) {
  const double cyanide[] = {1e-5, 1e-3};
  const double shares[2][3] = {{0.715150691, 0.284706618, 0.000142691322}, {0.0233612223, 0.930027011, 0.0466117665}};
  const double bound[] = {2.284992, 3.02325054};
  for (int k = 0; k < 2; ++k) {
    Problem problem;
    problem.species("Cu^+ + 2 CN^- = Cu(CN)2^-", 24).species("Cu^+ + 3 CN^- = Cu(CN)3^2-", 28.6).species("Cu^+ + 4 CN^- = Cu(CN)4^3-", 30.3);
    const Answer answer = problem.feed("Cu^+", 0.01).hold("CN^-", cyanide[k]).solve();
    EXPECT_RELATIVE(answer.share("Cu(CN)2^-", "Cu^+"), shares[k][0], 1e-6);
    EXPECT_RELATIVE(answer.share("Cu(CN)3^2-", "Cu^+"), shares[k][1], 1e-6);
    EXPECT_RELATIVE(answer.share("Cu(CN)4^3-", "Cu^+"), shares[k][2], 1e-6);
    EXPECT_RELATIVE(answer.per_metal("CN^-", "Cu^+"), bound[k], 1e-6);
  }
}

// Bjerrum 1941 for the constants, from memory; one balance of ammonia in closed form. Hydroxides switched off.
TEST(bjerrum_1941, three_metals_share_ammonia) {
  Problem problem;
  problem.steps("Ag^+", "NH3", silver_ammines, {3.2, 3.83}).steps("Cu^2+", "NH3", copper_ammines, {4.15, 3.5, 2.89, 2.13});
  problem.steps("Zn^2+", "NH3", zinc_ammines, {2.37, 2.44, 2.5, 2.15}).species("H^+ + NH3 = NH4^+", 9.25);
  const Answer answer = problem.feed("Ag^+", 0.001).feed("Cu^2+", 0.05).feed("Zn^2+", 0.02).feed("NH3", 1).hold_ph(10).solve();
  EXPECT_RELATIVE(answer.molality("NH3"), 0.610305205, 1e-6);
  EXPECT_RELATIVE(answer.molality("Ag^+"), 2.50495831e-10, 1e-5);
  EXPECT_RELATIVE(answer.molality("Cu^2+"), 7.61249996e-14, 1e-5);
  EXPECT_RELATIVE(answer.molality("Zn^2+"), 4.94091042e-11, 1e-5);
  EXPECT_RELATIVE(answer.per_metal("NH3", "Ag^+"), 1.9997572, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("NH3", "Cu^2+"), 3.98794882, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("NH3", "Zn^2+"), 3.98841394, 1e-6);
}

// Sharpe 1976, Smith and Martell 1976; log beta2 of gold as used in cyanidation texts; all from memory. One balance of
// cyanide, by bisection to 35 digits. Free metals fall to 1e-39 mol/L, which is the point of the case.
TEST(sharpe_1976, five_metals_share_cyanide) {
  Problem problem;
  problem.species("Au^+ + 2 CN^- = Au(CN)2^-", 38.3).species("Ag^+ + 2 CN^- = Ag(CN)2^-", 20.5);
  problem.species("Cu^+ + 2 CN^- = Cu(CN)2^-", 24).species("Cu^+ + 3 CN^- = Cu(CN)3^2-", 28.6).species("Cu^+ + 4 CN^- = Cu(CN)4^3-", 30.3);
  problem.species("Zn^2+ + 2 CN^- = Zn(CN)2(aq)", 11.07).species("Zn^2+ + 3 CN^- = Zn(CN)3^-", 16.05);
  problem.species("Zn^2+ + 4 CN^- = Zn(CN)4^2-", 19.62).species("Ni^2+ + 4 CN^- = Ni(CN)4^2-", 31).species("H^+ + CN^- = HCN", 9.21);
  problem.feed("Au^+", 2e-5).feed("Ag^+", 1e-4).feed("Cu^+", 2e-3).feed("Zn^2+", 1e-3).feed("Ni^2+", 5e-4).feed("CN^-", 0.02);
  const Answer answer = problem.hold_ph(10.5).solve();
  EXPECT_RELATIVE(answer.molality("CN^-"), 0.00693292909, 1e-6);
  EXPECT_RELATIVE(answer.molality("HCN"), 0.000355563161, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("CN^-", "Au^+"), 2.0, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("CN^-", "Ag^+"), 2.0, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("CN^-", "Cu^+"), 3.25449507, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("CN^-", "Zn^2+"), 3.96251761, 1e-6);
  EXPECT_RELATIVE(answer.per_metal("CN^-", "Ni^2+"), 4.0, 1e-6);
  EXPECT_RELATIVE(answer.molality("Au^+"), 2.08543414e-39, 1e-5);
  EXPECT_RELATIVE(answer.molality("Ag^+"), 6.57909995e-21, 1e-5);
  EXPECT_RELATIVE(answer.molality("Cu^+"), 1.11582113e-25, 1e-5);
  EXPECT_RELATIVE(answer.molality("Zn^2+"), 9.99463911e-15, 1e-5);
  EXPECT_RELATIVE(answer.molality("Ni^2+"), 2.16422781e-26, 1e-5);
}

}  // namespace
}  // namespace leat::test
