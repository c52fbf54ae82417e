// Complexes and the solids they dissolve, against published and closed-form cases: ammonia, thiosulfate, cyanide, chloride.
//
// Amounts are per litre with one kilogram of solvent water in it, 25 degC, every activity coefficient and the activity of
// water one, unless a test says otherwise. Each problem holds the species its source names and no others. "Exact" as
// the reason of a tolerance: the expected value is the root of the stated equations, so that only the solver's error and the
// digits of the expected value remain.
#include "tests/support/expect.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

constexpr double molar_mass_agcl = 107.87 + 35.45;  // [g/mol]

Problem silver_in_ammonia(double log10_ksp_agcl, double kf) {
  Problem problem;
  problem.species("Ag^+ + 2 NH3 = Ag(NH3)2^+", std::log10(kf)).solid("AgCl = Ag^+ + Cl^-", log10_ksp_agcl);
  return problem;
}

// Kf = 1.7e7: Flowers, Theopold, Langley and Robinson, Chemistry 2e (2019), Appendix K. Common-practice check, no single
// source for the problem. Printed: K 0.0029, solubility 0.29 mol/L.
// Tolerance 1e-4: the closed form neglects free Ag+ (6e-10 mol/L).
TEST(chemistry_2e, silver_chloride_in_6_molar_ammonia) {
  for (const auto& model : {unit_activity(), ideal_activity()}) {
    const Answer answer = silver_in_ammonia(std::log10(1.7e-10), 1.7e7).activity(model).feed("AgCl", 1).feed("NH3", 6).solve();
    EXPECT_RELATIVE(answer.dissolved("Ag^+"), 0.291239045, 1e-4);
    EXPECT_RELATIVE(answer.dissolved("Ag^+") * molar_mass_agcl, 41.7407294, 1e-4);
    EXPECT_RELATIVE(answer.molality("NH3"), 5.41752191, 1e-4);
    EXPECT_RELATIVE(1 - answer.amount("AgCl"), 0.291239045, 1e-4);
    const double k = answer.molality("Ag(NH3)2^+") * answer.molality("Cl^-") / std::pow(answer.molality("NH3"), 2);
    EXPECT_RELATIVE(k, 0.00289, 1e-6);  // exact
  }
}

// Chemistry 2e, section Coupled Equilibria, exercise (no answer printed); constants of its Appendices J and K.
// Tolerance 2e-4: free Ag+ neglected; 3e-4 on mass: molar mass besides.
TEST(chemistry_2e, silver_iodide_in_1_molar_ammonia) {
  Problem problem;
  problem.component("I^-").species("Ag^+ + 2 NH3 = Ag(NH3)2^+", std::log10(1.7e7)).solid("AgI = Ag^+ + I^-", std::log10(1.5e-16));
  const Answer answer = problem.feed("AgI", 0.01).feed("NH3", 1).solve();
  EXPECT_RELATIVE(answer.molality("Ag(NH3)2^+"), 5.04924252e-05, 2e-4);
  EXPECT_RELATIVE(answer.dissolved("Ag^+") * 234.77, 0.0118542415, 3e-4);
}

// Zumdahl and Zumdahl, Chemistry, worked example, from memory; printed 0.48 mol/L.
// Tolerance 3e-4: the closed form keeps Ag(NH3)2+ only, Ag(NH3)+ adds 1.4e-5.
TEST(zumdahl, silver_chloride_in_10_molar_ammonia_stepwise) {
  Problem problem;
  problem.steps("Ag^+", "NH3", {"Ag(NH3)^+", "Ag(NH3)2^+"}, {std::log10(2100.0), std::log10(8200.0)});
  problem.solid("AgCl = Ag^+ + Cl^-", std::log10(1.6e-10));
  EXPECT_RELATIVE(problem.feed("AgCl", 1).feed("NH3", 10).solve().dissolved("Ag^+"), 0.475031214, 3e-4);
}

// Chemistry 2e, section Coupled Equilibria, Check Your Learning after the thiosulfate example; printed 5.0 g.
// Tolerance 1e-3: molar masses and the neglected free Ag+.
TEST(chemistry_2e, ammonia_that_dissolves_2_grams_of_silver_chloride) {
  const double agcl = 2.00 / molar_mass_agcl;
  const double ammonia = root_between(0.05, 5, [&](double total) {
    return silver_in_ammonia(std::log10(1.6e-10), 1.7e7).never_forms().feed("AgCl", agcl).feed("NH3", total).solve().log10_omega("AgCl");
  });
  EXPECT_RELATIVE(ammonia, 0.295477916, 1e-3);
  EXPECT_RELATIVE(ammonia * 17.031, 5.03228438, 1e-3);
}

// Chemistry 2e, section Coupled Equilibria, example Multiple Equilibria; printed 1.85 g of Na2S2O3.
// Tolerance 1e-3: molar masses.
TEST(chemistry_2e, thiosulfate_that_dissolves_1_gram_of_silver_bromide) {
  const double agbr = 1.00 / (107.87 + 79.904);
  const double thiosulfate = root_between(1e-3, 1, [&](double total) {
    Problem problem;
    problem.component("Br^-").component("S2O3^2-").species("Ag^+ + 2 S2O3^2- = Ag(S2O3)2^3-", std::log10(4.7e13));
    problem.solid("AgBr = Ag^+ + Br^-", std::log10(5.0e-13)).never_forms();
    return problem.feed("AgBr", agbr).feed("S2O3^2-", total).feed("Na^+", 2 * total).solve().log10_omega("AgBr");
  });
  EXPECT_RELATIVE(thiosulfate, 0.0117497918, 1e-3);
  EXPECT_RELATIVE(thiosulfate * 158.097, 1.85760142, 1e-3);
}

// Zumdahl and Zumdahl, Chemistry, 9th ed., chapter 16, problem 72. The answer page prints 3.625 mol/L, which ignores the
// thiosulfate used up; the root here obeys the balance of the ligand. Tolerance 1e-4: exact root; 3e-4 on mass: molar mass.
TEST(zumdahl, silver_bromide_in_thiosulfate_obeys_the_ligand_balance) {
  Problem problem;
  problem.component("Br^-").component("S2O3^2-").species("Ag^+ + 2 S2O3^2- = Ag(S2O3)2^3-", std::log10(2.9e13));
  problem.solid("AgBr = Ag^+ + Br^-", std::log10(5.0e-13));
  const Answer answer = problem.feed("AgBr", 1).feed("S2O3^2-", 0.5).feed("Na^+", 1).solve();
  EXPECT_RELATIVE(answer.dissolved("Ag^+"), 0.220983451, 1e-4);
  EXPECT_RELATIVE(answer.dissolved("Ag^+") * 187.77, 41.4945488, 3e-4);
  const double k = answer.molality("Ag(S2O3)2^3-") * answer.molality("Br^-") / std::pow(answer.molality("S2O3^2-"), 2);
  EXPECT_RELATIVE(k, 14.5, 1e-6);
}

// Chemistry 2e, section Lewis Acids and Bases, exercise (no answer printed). Tolerance 2e-4: free Ag+ neglected (6e-8).
TEST(chemistry_2e, ammonia_that_dissolves_3_millimoles_of_silver_bromide) {
  const double ammonia = root_between(0.1, 10, [&](double total) {
    Problem problem;
    problem.component("Br^-").species("Ag^+ + 2 NH3 = Ag(NH3)2^+", std::log10(1.7e7));
    problem.solid("AgBr = Ag^+ + Br^-", std::log10(5.0e-13)).never_forms();
    return problem.feed("AgBr", 0.003).feed("NH3", total).solve().log10_omega("AgBr");
  });
  EXPECT_RELATIVE(ammonia, 1.03499151, 2e-4);
}

// Chemistry 2e, section Lewis Acids and Bases, example Dissociation of a Complex Ion; printed 0.0011, 0.0022, 0.099 mol/L.
// Tolerance 1e-6: exact.
TEST(chemistry_2e, dissociation_of_silver_diammine) {
  Problem problem;
  problem.species("Ag^+ + 2 NH3 = Ag(NH3)2^+", std::log10(1.7e7));
  const Answer answer = problem.feed("Ag(NH3)2^+", 0.1).feed("NO3^-", 0.1).solve();
  EXPECT_RELATIVE(answer.molality("Ag^+"), 0.00113287241, 1e-6);
  EXPECT_RELATIVE(answer.molality("NH3"), 0.00226574483, 1e-6);
  EXPECT_RELATIVE(answer.molality("Ag(NH3)2^+"), 0.0988671276, 1e-6);
}

// Chemistry 2e, section Lewis Acids and Bases, Check Your Learning; printed 2.9e-22 mol/L. Hydrolysis of cyanide ignored as
// in the text. Tolerance 1e-3: molar masses.
TEST(chemistry_2e, free_silver_in_excess_cyanide) {
  Problem problem;
  problem.species("Ag^+ + 2 CN^- = Ag(CN)2^-", 21);
  const Answer answer = problem.feed("AgNO3", 1.00 / 169.874).feed("KCN", 10.0 / 65.116).solve();
  EXPECT_RELATIVE(answer.molality("Ag^+"), 2.92778085e-22, 1e-3);
  EXPECT_RELATIVE(answer.molality("CN^-"), 0.141797822, 1e-3);
}

// Chemistry 2e, section Lewis Acids and Bases, exercise; printed 8.2e-5 by an approximate method, 5 percent high. Only the
// 1:4 complex, as in the text. Tolerance 1e-6: exact.
TEST(chemistry_2e, free_cadmium_in_ammonia) {
  Problem problem;
  problem.species("Cd^2+ + 4 NH3 = Cd(NH3)4^2+", std::log10(1.3e7));
  const Answer answer = problem.feed("Cd^2+", 0.004).feed("NO3^-", 0.008).feed("NH3", 0.06).solve();
  EXPECT_RELATIVE(answer.molality("Cd^2+"), 7.82375552e-05, 1e-6);
  EXPECT_RELATIVE(answer.molality("NH3"), 0.0443129502, 1e-6);
}

// Chemistry 2e, section Lewis Acids and Bases, exercises on dissociation constants; printed 5.0e-5 and 2.0e-4 (cadmium),
// 3.0e-6 and 1.8e-5 (cobalt), none for iron. Protonation left out as in the text. Tolerance 1e-6: exact.
TEST(chemistry_2e, dissociation_of_three_complexes_from_their_constants) {
  Problem cadmium, cobalt, iron;
  cadmium.species("Cd^2+ + 4 CN^- = Cd(CN)4^2-", -std::log10(3.3e-19));
  const Answer cd = cadmium.feed("Cd(CN)4^2-", 0.25).feed("K^+", 0.5).solve();
  EXPECT_RELATIVE(cd.molality("Cd^2+"), 5.03066406e-05, 1e-6);
  EXPECT_RELATIVE(cd.molality("CN^-"), 0.000201226562, 1e-6);

  cobalt.component("Co^3+", ComponentRole::metal).species("Co^3+ + 6 NH3 = Co(NH3)6^3+", -std::log10(2.2e-34));
  const Answer co = cobalt.feed("Co(NH3)6^3+", 0.5).feed("NO3^-", 1.5).solve();
  EXPECT_RELATIVE(co.molality("Co^3+"), 3.03237719e-06, 1e-6);
  EXPECT_RELATIVE(co.molality("NH3"), 1.81942631e-05, 1e-6);

  iron.species("Fe^3+ + 6 CN^- = Fe(CN)6^3-", 44);
  const Answer fe = iron.feed("Fe(CN)6^3-", 0.333).feed("K^+", 0.999).solve();
  EXPECT_RELATIVE(fe.molality("Fe^3+"), 9.52964359e-08, 1e-6);
  EXPECT_RELATIVE(fe.molality("CN^-"), 5.71778615e-07, 1e-6);
}

// Chemistry 2e, section Coupled Equilibria, exercise; printed 0.014 mol/L. Tolerance 1e-6: exact.
TEST(chemistry_2e, dissociation_of_nickel_hexammine) {
  Problem problem;
  problem.species("Ni^2+ + 6 NH3 = Ni(NH3)6^2+", std::log10(2.0e8));
  const Answer answer = problem.feed("Ni(NH3)6^2+", 1).feed("NO3^-", 2).solve();
  EXPECT_RELATIVE(answer.molality("Ni^2+"), 0.0140047951, 1e-6);
  EXPECT_RELATIVE(answer.molality("NH3"), 0.0840287703, 1e-6);
}

// Chemistry 2e, section Coupled Equilibria, exercise; printed 7.2e-15 mol/L. Only the 1:4 complex. Tolerance 1e-6: exact.
TEST(chemistry_2e, free_copper_in_1_molar_ammonia) {
  Problem problem;
  problem.species("Cu^2+ + 4 NH3 = Cu(NH3)4^2+", std::log10(1.7e13));
  const Answer answer = problem.feed("Cu^2+", 0.05).feed("NO3^-", 0.1).feed("NH3", 1).solve();
  EXPECT_RELATIVE(answer.molality("Cu^2+"), 7.18060662e-15, 1e-6);
  EXPECT_RELATIVE(answer.molality("NH3"), 0.8, 1e-6);
}

Problem silver_cyanide() {
  Problem problem;
  problem.species("Ag^+ + 2 CN^- = Ag(CN)2^-", 21).solid("AgCN = Ag^+ + CN^-", std::log10(1.2e-16));
  return problem;
}

// Chemistry 2e, section Lewis Acids and Bases, exercise; printed 1.3 g of KCN. Tolerance 1e-4: molar mass; 1e-3 on the trace
// of free cyanide that is left.
TEST(chemistry_2e, potassium_cyanide_that_dissolves_silver_cyanide) {
  const auto with = [](double kcn) { return silver_cyanide().never_forms().feed("AgCN", 0.2).feed("KCN", kcn).solve(); };
  const double kcn = root_between(0.19, 0.3, [&](double total) { return with(total).log10_omega("AgCN"); });
  EXPECT_RELATIVE(kcn * 0.1 * 65.116, 1.30233685, 1e-4);
  EXPECT_RELATIVE(with(kcn).molality("CN^-"), 1.66666667e-06, 1e-3);
}

// Chemistry 2e, section Lewis Acids and Bases, exercise (no answer printed). Hydrolysis ignored. Tolerance 1e-6: exact.
// The salt dissolves as Ag+ and Ag(CN)2-: the free ligand is not what carries the ligand.
TEST(chemistry_2e, water_saturated_with_silver_cyanide) {
  const Answer answer = silver_cyanide().feed("AgCN", 1e-3).solve();
  EXPECT_RELATIVE(answer.molality("Ag^+"), 3.794749e-06, 1e-6);
  EXPECT_RELATIVE(answer.molality("CN^-"), 3.16226448e-11, 1e-6);
  EXPECT_RELATIVE(answer.molality("Ag(CN)2^-"), 3.79471738e-06, 1e-6);
}

// Closed form with constants of Chemistry 2e, Appendices J and K; hydrolysis ignored. Tolerance 1e-6: exact.
TEST(chemistry_2e, silver_iodide_in_cyanide) {
  Problem problem;
  problem.component("I^-").species("Ag^+ + 2 CN^- = Ag(CN)2^-", 21).solid("AgI = Ag^+ + I^-", std::log10(1.5e-16));
  const Answer answer = problem.feed("AgI", 0.2).feed("KCN", 0.1).solve();
  EXPECT_RELATIVE(answer.dissolved("Ag^+"), 0.0499355335, 1e-6);
  EXPECT_RELATIVE(answer.molality("CN^-"), 0.000128932993, 1e-6);
}

// Chemistry 2e, section Lewis Acids and Bases, exercise on the Liebig titration; printed 0.0281 g of NaCN. At the end point there
// are two cyanides per silver. Tolerance 2e-4: molar masses.
TEST(chemistry_2e, liebig_end_point) {
  ComponentAmounts amounts;
  double molar_mass = 0;  // [kg/mol]
  std::string fault;
  ASSERT_TRUE(components_of(embedded_library(), "NaCN", amounts, molar_mass, fault)) << fault;
  EXPECT_RELATIVE(2 * 28.72e-3 * 0.0100 / amounts.amounts["CN^-"] * 1000 * molar_mass, 0.0281500631, 2e-4);
}

Problem silver_chloride_complexes() {
  Problem problem;
  problem.steps("Ag^+", "Cl^-", {"AgCl(aq)", "AgCl2^-"}, {3.7, 1.92}).solid("AgCl = Ag^+ + Cl^-", std::log10(1.8e-10));
  return problem;
}

// Harvey, Analytical Chemistry 2.1, chapters 6 and 8; constants from memory, the minimum in closed form.
// Tolerance 1e-3 on the place, which is flat; 1e-6 on the least solubility: exact.
TEST(harvey, least_solubility_of_silver_chloride_in_chloride) {
  const auto at = [](double pcl) { return silver_chloride_complexes().feed("AgCl", 1).hold("Cl^-", std::pow(10, -pcl)).solve().dissolved("Ag^+"); };
  const double pcl = minimum_between(1, 5, at);
  EXPECT_NEAR(pcl, 2.81, 5e-4);
  EXPECT_RELATIVE(std::pow(10, -pcl), 0.00154881662, 1e-3);
  EXPECT_RELATIVE(at(pcl), 1.13457254e-06, 1e-6);
}

// Form of the curve: Harvey, Analytical Chemistry 2.1, chapter 6; constants from memory. Tolerance 1e-6: exact.
TEST(harvey, silver_chloride_at_held_chloride) {
  const double chloride[] = {0.001, 0.01, 0.1}, expected[] = {1.15717351e-06, 1.67050191e-06, 8.40758592e-06};
  for (int k = 0; k < 3; ++k)
    EXPECT_RELATIVE(silver_chloride_complexes().feed("AgCl", 1).hold("Cl^-", chloride[k]).solve().dissolved("Ag^+"), expected[k], 1e-6);
}

// Closed form with constants of Chemistry 2e, Appendices J and K. Tolerance 1e-6: exact.
TEST(chemistry_2e, dichloroargentate_over_silver_chloride) {
  Problem problem;
  problem.species("Ag^+ + 2 Cl^- = AgCl2^-", std::log10(180000.0)).solid("AgCl = Ag^+ + Cl^-", std::log10(1.6e-10));
  EXPECT_RELATIVE(problem.feed("AgCl", 1).hold("Cl^-", 1).solve().molality("AgCl2^-"), 2.88e-05, 1e-6);
}

// Stability constants at zero ionic strength as in Powell and others, Pure Appl. Chem. 81 (2009) 2425, from memory; one
// equation for the chloride, solved to 30 digits. Tolerance 1e-6: exact.
TEST(powell_2009, lead_chloride_in_brine) {
  const double salt[] = {0, 0.1, 1}, lead[] = {0.0282658075, 0.00877781131, 0.00439349076}, chloride[] = {0.0378581549, 0.107735964, 0.998874184};
  for (int k = 0; k < 3; ++k) {
    Problem problem;
    problem.species("Pb^2+ + Cl^- = PbCl^+", 1.5).species("Pb^2+ + 2 Cl^- = PbCl2(aq)", 2.1).species("Pb^2+ + 3 Cl^- = PbCl3^-", 2.0);
    problem.solid("PbCl2 = Pb^2+ + 2 Cl^-", std::log10(1.7e-5));
    const Answer answer = problem.feed("PbCl2", 0.2).feed("NaCl", salt[k]).solve();
    EXPECT_RELATIVE(answer.dissolved("Pb^2+"), lead[k], 1e-6);
    EXPECT_RELATIVE(answer.molality("Cl^-"), chloride[k], 1e-6);
  }
}

// Noyes and Chow, J. Am. Chem. Soc. 40 (1918) 739: K = 0.065 of CuCl(s) + Cl- = CuCl2-, from memory. Only the product of the
// two constants is known; free Cu+ is kept negligible by the split. Tolerance 1e-6: exact.
TEST(noyes_chow_1918, copper_chloride_in_chloride) {
  const double chloride[] = {0.1, 1}, expected[] = {0.00610328638, 0.0610328638};
  for (int k = 0; k < 2; ++k) {
    Problem problem;
    problem.species("Cu^+ + 2 Cl^- = CuCl2^-", std::log10(0.065) + 20).solid("CuCl = Cu^+ + Cl^-", -20);
    EXPECT_RELATIVE(problem.feed("CuCl", 1).feed("NaCl", chloride[k]).solve().molality("CuCl2^-"), expected[k], 1e-6);
  }
}

Problem silver_ammine_liquor(double ammonia, double acid) {
  Problem problem;
  problem.species("Ag^+ + NH3 = Ag(NH3)^+", 3.31).species("Ag^+ + 2 NH3 = Ag(NH3)2^+", 7.22).species("H^+ + NH3 = NH4^+", 9.25);
  problem.solid("AgCl = Ag^+ + Cl^-", std::log10(1.77e-10));
  problem.feed("AgCl", 1).feed("NH3", ammonia).feed("H^+", acid).feed("NO3^-", acid);
  return problem;
}

// A standard exercise of analytical chemistry (at 0.14 mol/L found as such); three balances solved to 25 digits, constants
// from memory. Tolerance 1e-6, pH 1e-5: exact.
TEST(analytical_exercise, silver_chloride_in_ammonia_with_protonation) {
  const double ammonia[] = {0.14, 1, 3}, silver[] = {0.00677617886, 0.0487058976, 0.146358576}, ph[] = {11.1733919, 11.6017826, 11.8407108},
               free[] = {0.124963654, 0.898597434, 2.70035988};
  for (int k = 0; k < 3; ++k) {
    const Answer answer = silver_ammine_liquor(ammonia[k], 0).solve();
    EXPECT_RELATIVE(answer.dissolved("Ag^+"), silver[k], 1e-6);
    EXPECT_NEAR(answer.ph(), ph[k], 1e-5);
    EXPECT_RELATIVE(answer.molality("NH3"), free[k], 1e-6);
  }
}

// Common-practice check, no source: acid brings silver chloride back out of the ammine liquor. Same three balances with the
// anion of the acid. Tolerance 1e-5, pH 1e-4: exact.
TEST(common_practice, acid_returns_silver_chloride) {
  const double before = silver_ammine_liquor(6, 0).solve().dissolved("Ag^+");
  EXPECT_RELATIVE(before, 0.292912145, 1e-5);
  const double acid[] = {3, 6.2}, after[] = {0.146696637, 1.33043639e-05}, ph[] = {9.20530008, 0.698969967}, back[] = {0.499178715, 0.999954579};
  for (int k = 0; k < 2; ++k) {
    const Answer answer = silver_ammine_liquor(6, acid[k]).solve();
    EXPECT_RELATIVE(answer.dissolved("Ag^+"), after[k], 1e-5);
    EXPECT_NEAR(answer.ph(), ph[k], 1e-4);
    EXPECT_NEAR(1 - answer.dissolved("Ag^+") / before, back[k], 1e-5);
  }
}

}  // namespace
}  // namespace leat::test
