// Acids, bases and the solids that follow pH, against published and closed-form cases.
//
// As in chemistry_test.cpp: per litre with one kilogram of solvent in it, 25 degC, all activity coefficients and the activity
// of water one, only the species that the source names. "Exact": the expected value is the root of the stated equations.
#include "tests/support/expect.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

Problem ammonia(double kb) {
  Problem problem;
  problem.species("H^+ + NH3 = NH4^+", std::log10(kb) + 14);
  return problem;
}

Problem cyanide() {
  Problem problem;
  problem.species("H^+ + CN^- = HCN", -std::log10(4.9e-10));
  return problem;
}

Problem carbonate() {
  Problem problem;
  problem.species("H^+ + CO3^2- = HCO3^-", 10.33).species("H^+ + HCO3^- = H2O + CO2", 6.35);
  return problem;
}

// Flowers, Theopold, Langley and Robinson, Chemistry 2e (2019), section Equilibrium Calculations; printed OH- 0.0021 mol/L.
// Tolerance 1e-6, pH 1e-5: exact.
TEST(chemistry_2e, ph_of_aqueous_ammonia) {
  const Answer answer = ammonia(1.8e-5).feed("NH3", 0.25).solve();
  EXPECT_RELATIVE(answer.molality("OH^-"), 0.00211233944, 1e-6);
  EXPECT_NEAR(answer.ph(), 11.3247637, 1e-5);
}

// Chemistry 2e, section Relative Strengths of Acids and Bases: Kb 1.77e-5 from pH 11.612 of 0.950 mol/L ammonia.
// Tolerance 1e-4 of Kb as the case gives it, the arithmetic; the measured pH has three decimals.
TEST(chemistry_2e, constant_of_ammonia_from_its_ph) {
  const double kb = root_between(1e-6, 1e-3, [](double k) { return ammonia(k).feed("NH3", 0.95).solve().ph() - 11.612; });
  EXPECT_RELATIVE(kb, 1.77072606e-05, 1e-4);
}

// Chemistry 2e, section Buffers, exercise; printed 8.95. Tolerance 1e-5: exact.
TEST(chemistry_2e, buffer_of_ammonia_and_ammonium_nitrate) {
  const Answer answer = ammonia(1.8e-5).feed("NH3", 0.2).feed("NH4NO3", 0.4).solve();
  EXPECT_NEAR(answer.ph(), 8.9542132, 1e-5);
  EXPECT_RELATIVE(answer.molality("OH^-"), 8.99939263e-06, 1e-5);
}

// Chemistry 2e, sections Equilibrium Calculations (printed 8.56e-6 mol/L) and Relative Strengths (printed 6.3e-6 mol/L).
// Tolerance 1e-6, pH 1e-5: exact.
TEST(chemistry_2e, ph_of_hydrogen_cyanide) {
  const double total[] = {0.15, 0.081}, hydrogen[] = {8.57355233e-06, 6.30054867e-06}, ph[] = {5.0668392, 5.20062163}, ion[] = {8.57238595e-06, 6.2989615e-06};
  for (int k = 0; k < 2; ++k) {
    const Answer answer = cyanide().feed("HCN", total[k]).solve();
    EXPECT_RELATIVE(answer.molality("H^+"), hydrogen[k], 1e-6);
    EXPECT_NEAR(answer.ph(), ph[k], 1e-5);
    EXPECT_RELATIVE(answer.molality("CN^-"), ion[k], 1e-6);
  }
}

// Chemistry 2e, section Hydrolysis of Salts, Check Your Learning; printed 11.11. Tolerance 1e-5: exact.
TEST(chemistry_2e, ph_of_sodium_cyanide) {
  const Answer answer = cyanide().feed("NaCN", 0.083).solve();
  EXPECT_NEAR(answer.ph(), 11.111036, 1e-5);
  EXPECT_RELATIVE(answer.molality("HCN"), 0.00129132643, 1e-5);
}

// Chemistry 2e, section Hydrolysis of Salts, Check Your Learning; printed 7.5e-6 mol/L. Tolerance 1e-6: exact.
TEST(chemistry_2e, hydronium_of_ammonium_nitrate) {
  EXPECT_RELATIVE(ammonia(1.8e-5).feed("NH4NO3", 0.1).solve().molality("H^+"), 7.45395299e-06, 1e-6);
}

// pKa 9.21: Izatt, Christensen, Pack and Bench, Inorg. Chem. 1 (1962) 828, from memory. Tolerance 1e-6: exact.
TEST(izatt_1962, share_of_hydrogen_cyanide_against_ph) {
  const double ph[] = {8, 9.21, 10.5, 11}, share[] = {0.941921586, 0.5, 0.0487841859, 0.0159592719};
  for (int k = 0; k < 4; ++k) {
    Problem problem;
    problem.species("H^+ + CN^- = HCN", 9.21);
    EXPECT_RELATIVE(problem.feed("CN^-", 0.006).hold_ph(ph[k]).solve().share("HCN", "CN^-"), share[k], 1e-6);
  }
}

// Emerson, Russo, Lund and Thurston, J. Fish. Res. Board Can. 32 (1975) 2379, from memory: pKa = 0.09018 + 2729.92/T.
// The embedded library against it. Tolerance 5e-3: the table has three figures and takes T as degC + 273.2.
TEST(emerson_1975, share_of_ammonia_in_the_embedded_library) {
  const double celsius[] = {25, 25, 20}, ph[] = {8, 9, 8}, share[] = {0.0538421385, 0.362676082, 0.0382053964}, pka[] = {9.2448413, 9.2448413, 9.40095763};
  for (int k = 0; k < 3; ++k) {
    const double kelvin = celsius[k] + 273.15;
    Problem problem = Problem::from_library().temperature(kelvin).feed("NH3", 1e-4).hold_ph(ph[k]);
    EXPECT_RELATIVE(problem.solve().share("NH3", "NH3"), share[k], 5e-3);
    EXPECT_NEAR(log10_k_at(embedded_library().find_species("NH4^+")->constant, kelvin), pka[k], 2e-3);
  }
}

// Standard trap of textbooks. Tolerance 1e-5: exact.
TEST(textbook_trap, ph_of_1e_8_molar_hydrochloric_acid) { EXPECT_NEAR(Problem().feed("H^+", 1e-8).feed("Cl^-", 1e-8).solve().ph(), 6.97829431, 1e-5); }

// Chemistry 2e, section Precipitation and Dissolution, example; printed 0.0069 mol/L. Tolerance 1e-5, pH 1e-4: exact.
TEST(chemistry_2e, calcium_hydroxide_from_its_solubility_product) {
  Problem problem;
  const Answer answer = problem.solid("Ca(OH)2 = Ca^2+ + 2 OH^-", std::log10(1.3e-6)).feed("Ca(OH)2", 0.1).solve();
  EXPECT_RELATIVE(answer.dissolved("Ca^2+"), 0.00687534434, 1e-5);
  EXPECT_NEAR(answer.ph(), 12.1383244, 1e-4);
}

// Chemistry 2e, section Precipitation and Dissolution; printed 7.9e-5, 0.0015 and 1.2e-8 mol/L. No complexes, no hydrolysis.
// Tolerance 1e-6: exact.
TEST(chemistry_2e, salts_from_their_solubility_products) {
  Problem copper, lead, silver;
  copper.component("Br^-").solid("CuBr = Cu^+ + Br^-", std::log10(6.3e-9)).feed("CuBr", 0.01);
  lead.component("I^-").solid("PbI2 = Pb^2+ + 2 I^-", std::log10(1.4e-8)).feed("PbI2", 0.01);
  silver.component("I^-").solid("AgI = Ag^+ + I^-", std::log10(1.5e-16)).feed("AgI", 0.01);
  EXPECT_RELATIVE(copper.solve().dissolved("Cu^+"), 7.93725393e-05, 1e-6);
  EXPECT_RELATIVE(lead.solve().dissolved("Pb^2+"), 0.00151829449, 1e-6);
  EXPECT_RELATIVE(silver.solve().dissolved("Ag^+"), 1.22474487e-08, 1e-6);
}

// Chemistry 2e, section Precipitation and Dissolution, Check Your Learning; printed 10.97. Lime is fed until 1e-5 mol/L of
// magnesium is left of 0.0537. Tolerance 1e-4: exact.
TEST(chemistry_2e, ph_at_which_lime_has_removed_magnesium) {
  const auto with = [](double hydroxide) {
    Problem problem;
    problem.solid("Mg(OH)2 = Mg^2+ + 2 OH^-", std::log10(8.9e-12));
    return problem.feed("Mg^2+", 0.0537).feed("Cl^-", 0.1074).feed("Ca^2+", hydroxide / 2).feed("OH^-", hydroxide).solve();
  };
  const double hydroxide = root_between(0.01, 0.2, [&](double total) { return std::log(1e-5 / with(total).molality("Mg^2+")); });
  EXPECT_NEAR(with(hydroxide).ph(), 10.974695, 1e-4);
}

// Closed form with constants of Chemistry 2e, Appendix J. Tolerance 1e-5: hydrogen carbonate is negligible at this pH; exact.
TEST(chemistry_2e, lime_makes_sodium_carbonate_caustic) {
  Problem problem;
  problem.solid("Ca(OH)2 = Ca^2+ + 2 OH^-", std::log10(1.3e-6)).solid("CaCO3 = Ca^2+ + CO3^2-", std::log10(8.7e-9));
  const Answer answer = problem.feed("Na2CO3", 1).feed("Ca(OH)2", 2).solve();
  EXPECT_RELATIVE(answer.molality("CO3^2-"), 0.0254253209, 1e-5);
  EXPECT_RELATIVE(answer.molality("OH^-"), 1.94915004, 1e-6);
  EXPECT_RELATIVE(answer.molality("Ca^2+"), 3.42178571e-07, 1e-5);
  EXPECT_NEAR(answer.amount("CaCO3"), 0.974574679, 1e-5);
}

// As above; water of the gypsum with activity one. Tolerance 1e-6, 1e-5 on the precipitate: exact.
TEST(chemistry_2e, lime_and_gypsum_together_in_sodium_sulfate) {
  Problem problem;
  problem.solid("Ca(OH)2 = Ca^2+ + 2 OH^-", std::log10(1.3e-6)).solid("CaSO4.2H2O = Ca^2+ + SO4^2- + 2 H2O", std::log10(6.1e-5));
  const Answer answer = problem.feed("Na2SO4", 0.1).feed("Ca(OH)2", 0.5).solve();
  EXPECT_RELATIVE(answer.molality("Ca^2+"), 0.000761520321, 1e-6);
  EXPECT_RELATIVE(answer.molality("OH^-"), 0.0413172043, 1e-6);
  EXPECT_RELATIVE(answer.molality("SO4^2-"), 0.0801029182, 1e-6);
  EXPECT_RELATIVE(answer.amount("CaSO4.2H2O"), 0.0198970818, 1e-5);
}

// Stumm and Morgan, Aquatic Chemistry, 3rd ed., 1996, carbonate chapter (pH about 8.3); constants from memory.
// Tolerance 1e-5, pH 1e-4: exact.
TEST(stumm_morgan_1996, calcite_open_to_air) {
  Problem problem = carbonate().solid("CaCO3 = Ca^2+ + CO3^2-", -8.48).feed("CaCO3", 0.01);
  const Answer answer = problem.hold_gas("CO2", std::pow(10, -1.47), std::pow(10, -3.5)).solve();
  EXPECT_NEAR(answer.ph(), 8.26093172, 1e-4);
  EXPECT_RELATIVE(answer.molality("Ca^2+"), 0.000444771104, 1e-5);
  EXPECT_RELATIVE(answer.molality("HCO3^-"), 0.000872834126, 1e-5);
}

// Stumm and Morgan 1996 (pH about 9.9 to 10), as above.
TEST(stumm_morgan_1996, calcite_closed_to_air) {
  const Answer answer = carbonate().solid("CaCO3 = Ca^2+ + CO3^2-", -8.48).feed("CaCO3", 0.01).solve();
  EXPECT_NEAR(answer.ph(), 9.90403176, 1e-4);
  EXPECT_RELATIVE(answer.molality("Ca^2+"), 0.000110199502, 1e-5);
}

// Baes and Mesmer, The Hydrolysis of Cations, 1976; constants from memory. pH 1e-3, as the minimum is flat; solubility 1e-5:
// exact. Mononuclear species only.
TEST(baes_mesmer_1976, least_solubility_of_zinc_hydroxide) {
  const auto solubility = [](double ph) {
    Problem problem;
    problem.species("OH^- + Zn^2+ = ZnOH^+", -8.96 + 14).species("2 OH^- + Zn^2+ = Zn(OH)2(aq)", -16.9 + 28);
    problem.species("3 OH^- + Zn^2+ = Zn(OH)3^-", -28.4 + 42).species("4 OH^- + Zn^2+ = Zn(OH)4^2-", -41.2 + 56);
    problem.solid("Zn(OH)2 + 2 H^+ = Zn^2+ + 2 H2O", 12.45);
    return problem.feed("Zn(OH)2", 1).hold_ph(ph).solve().dissolved("Zn^2+");
  };
  const double ph = minimum_between(7, 12, solubility);
  EXPECT_NEAR(ph, 9.77732408, 1e-3);
  EXPECT_RELATIVE(solubility(ph), 3.67485251e-05, 1e-5);
}

// As above, for gibbsite.
TEST(baes_mesmer_1976, least_solubility_of_gibbsite) {
  const auto solubility = [](double ph) {
    Problem problem;
    problem.component("Al^3+", ComponentRole::metal);
    problem.species("OH^- + Al^3+ = AlOH^2+", -4.97 + 14).species("2 OH^- + Al^3+ = Al(OH)2^+", -9.3 + 28);
    problem.species("3 OH^- + Al^3+ = Al(OH)3(aq)", -15 + 42).species("4 OH^- + Al^3+ = Al(OH)4^-", -23 + 56);
    problem.solid("Al(OH)3 + 3 H^+ = Al^3+ + 3 H2O", 8.5);
    return problem.feed("Al(OH)3", 1).hold_ph(ph).solve().dissolved("Al^3+");
  };
  const double ph = minimum_between(5, 9, solubility);
  EXPECT_NEAR(ph, 6.85132924, 1e-3);
  EXPECT_RELATIVE(solubility(ph), 3.61070477e-07, 1e-5);
}

Problem aluminium_hydroxide() {
  Problem problem;
  problem.component("Al^3+", ComponentRole::metal).solid("Al(OH)3 = Al^3+ + 3 OH^-", std::log10(2.0e-32)).feed("Al(OH)3", 0.1);
  return problem;
}

// Chemistry 2e, section Coupled Equilibria, example Increased Solubility in Acidic Solutions; printed 1.2e-4 mol/L. Free ion
// only. Tolerance 1e-4 as given: pH 4.74 of the buffer is held. The acetate buffer itself gives it within 2e-4 in pH, as
// hydronium adds to the acetate.
TEST(chemistry_2e, aluminium_over_its_hydroxide_in_an_acetate_buffer) {
  EXPECT_RELATIVE(aluminium_hydroxide().hold_ph(4.74).solve().molality("Al^3+"), 0.000120511917, 1e-4);
  Problem buffer;
  buffer.component("CH3COO^-").species("H^+ + CH3COO^- = CH3COOH", 4.74).feed("CH3COOH", 0.1).feed("CH3COO^-", 0.1).feed("Na^+", 0.1);
  EXPECT_NEAR(buffer.solve().ph(), 4.74, 2e-4);
}

// Chemistry 2e, section Coupled Equilibria, with the ionisation of water, which the printed answer (5e-9) leaves out.
// Tolerance 1e-5: exact.
TEST(chemistry_2e, aluminium_over_its_hydroxide_in_water) {
  const Answer answer = aluminium_hydroxide().solve();
  EXPECT_RELATIVE(answer.molality("Al^3+"), 1.99820243e-11, 1e-5);
  EXPECT_NEAR(answer.ph(), 7.00013017, 1e-5);
}

// Chemistry 2e, section Polyprotic Acids, example; printed 1.2e-4 and 4.7e-11 mol/L. Carbonic acid is held. Tolerance 1e-5: exact.
TEST(chemistry_2e, ions_of_carbonic_acid) {
  Problem problem;
  problem.species("H^+ + CO3^2- = HCO3^-", -std::log10(4.7e-11)).species("H^+ + HCO3^- = H2O + CO2", -std::log10(4.3e-7));
  const Answer answer = problem.hold("CO2", 0.033).solve();
  EXPECT_RELATIVE(answer.molality("H^+"), 0.000119121875, 1e-5);
  EXPECT_RELATIVE(answer.molality("HCO3^-"), 0.000119121697, 1e-5);
  EXPECT_RELATIVE(answer.molality("CO3^2-"), 4.69999298e-11, 1e-5);
}

// Chemistry 2e, section Coupled Equilibria, exercise; printed 0.049 and 2.2e-9 mol/L. Tolerance 1e-5, 1e-4 on barium: exact.
TEST(chemistry_2e, barium_sulfate_in_sodium_hydrogen_sulfate) {
  Problem problem;
  problem.weight("Ba", 137.33).component("Ba^2+", ComponentRole::metal).species("H^+ + SO4^2- = HSO4^-", -std::log10(0.012));
  problem.solid("BaSO4 = Ba^2+ + SO4^2-", std::log10(1.08e-10));
  const Answer answer = problem.feed("NaHSO4", 0.25).feed("BaSO4", 1e-3).solve();
  EXPECT_RELATIVE(answer.molality("SO4^2-"), 0.0490999093, 1e-5);
  EXPECT_RELATIVE(answer.molality("Ba^2+"), 2.19959673e-09, 1e-4);
}

// Constants of Chemistry 2e, Appendix J, and the usual pKa; closed form. Tolerance 1e-5, pH 1e-4: exact.
TEST(chemistry_2e, lime_frees_ammonia) {
  Problem problem;
  problem.species("H^+ + NH3 = NH4^+", 9.25).solid("Ca(OH)2 = Ca^2+ + 2 OH^-", std::log10(1.3e-6));
  const Answer answer = problem.feed("NH4Cl", 0.1).feed("Ca(OH)2", 0.3).solve();
  EXPECT_NEAR(answer.ph(), 11.6976597, 1e-4);
  EXPECT_RELATIVE(answer.molality("NH3"), 0.0996445375, 1e-5);
  EXPECT_RELATIVE(answer.molality("Ca^2+"), 0.0523147371, 1e-5);
}

}  // namespace
}  // namespace leat::test
