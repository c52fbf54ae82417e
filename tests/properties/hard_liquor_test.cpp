// Single liquors and sequences that are harder to solve than random ones.
#include <gtest/gtest.h>

#include <cmath>

#include "tests/support/beaker.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

constexpr double room = 298.15;  // [K]

// Zinc in strong hydrogen cyanide, where the first steps of a line search are poor ones.
TEST(hard_liquor, kinsol_finishes_zinc_in_hydrogen_cyanide) {
  const auto chemistry = leach_chemistry(ideal_activity());
  std::vector<double> totals(chemistry->component_names.size(), 0.0);
  for (const auto& [name, amount] : {std::pair{"Ag^+", 6e-10}, {"Cu^2+", 3e-12}, {"Zn^2+", 0.01}, {"Fe^3+", 2e-7}, {"Ca^2+", 4e-10}, {"Na^+", 2e-9},
                                     {"NH3", 2e-11}, {"Cl^-", 3e-7}, {"CN^-", 2.0}, {"SO4^2-", 1e-9}, {"CO3^2-", 3e-11}}) {
    const int j = chemistry->find_component(name);
    totals[j] = amount;
    totals[chemistry->hydrogen] -= amount * chemistry->component_charge[j];
  }
  totals.back() = 55.508;
  EquilibriumState state;
  EXPECT_TRUE(EquilibriumSolver(chemistry).solve_cold(totals, room, state).ok);
  const SolveReport report = EquilibriumSolver(chemistry, Finish::kinsol).solve_cold(totals, room, state);
  EXPECT_TRUE(report.ok) << report.message << ", " << report.worst << " " << report.largest_residual << " after " << report.iterations;
}

// Lead hydroxide and carbonate with traces of copper close to where malachite takes the place of copper hydroxide.
TEST(hard_liquor, lead_slurry_with_two_copper_solids_close_by) {
  const std::vector<std::pair<std::string, double>> fed = {
      {"Au^+", 7.343073598365503e-07},  {"Cu^2+", 5.9924503176400656e-05}, {"Pb^2+", 3.8002252023761125},   {"Fe^3+", 6.9730971693997371e-05},
      {"Ni^2+", 2.8659781162029931e-06}, {"Cd^2+", 1.5227885169588298e-05}, {"Ca^2+", 7.4790794571525956e-10}, {"Mg^2+", 2.7356760510573402e-07},
      {"Na^+", 0.006072405300869335},   {"K^+", 1.6298201279285066e-06},   {"NH3", 0.14841190703894869},    {"Cl^-", 2.1092828971076076e-08},
      {"NO3^-", 1.0733010681429312e-08}, {"CO3^2-", 0.28326041474747088},   {"O2", 0.046278688077577795}};
  ChemistryRequest request;
  request.activity = davies_activity();
  for (const auto& [name, amount] : fed) request.components.push_back(name);
  Diagnostics diagnostics;
  const auto chemistry = compile_chemistry(embedded_library(), request, {}, diagnostics);
  std::vector<double> totals(chemistry->component_names.size(), 0.0);
  for (const auto& [name, amount] : fed) {
    const int j = chemistry->find_component(name);
    totals[j] = amount;
    totals[chemistry->hydrogen] -= amount * chemistry->component_charge[j];
  }
  totals.back() = 55.508;
  EquilibriumSolver solver(chemistry);
  for (double kelvin : {298.15, 340.0, 346.15, 350.0}) {
    EquilibriumState state;
    const SolveReport report = solver.solve_cold(totals, kelvin, state);
    EXPECT_TRUE(report.ok) << kelvin << " K: " << report.message << ", " << report.worst << " " << report.largest_residual;
  }
}

// A titration: what was solved with a held pH starts the closed liquor, and the other way round.
TEST(hard_liquor, a_held_state_can_start_a_closed_liquor) {
  const auto chemistry = leach_chemistry(davies_activity());
  EquilibriumSolver solver(chemistry);
  BeakerMaker maker(*chemistry, 39);
  const std::vector<Reservoir> held = {{"H^+", {{chemistry->hydrogen, 1.0}}, 0, -10 * std::log(10.0)}};
  for (int turn = 0; turn < 30; ++turn) {
    const std::vector<double> totals = maker.next();
    EquilibriumState closed, open;
    ASSERT_TRUE(solver.solve_cold(totals, room, closed).ok);
    ASSERT_TRUE(solver.solve_cold(totals, room, open, held).ok);
    EXPECT_NEAR(open.ph, 10, 1e-9);
    EquilibriumState from_closed = closed, from_open = open;
    ASSERT_TRUE(solver.solve(totals, room, from_closed, held).ok);
    ASSERT_TRUE(solver.solve(totals, room, from_open).ok);
    EXPECT_NEAR(from_closed.ph, 10, 1e-9);
    EXPECT_NEAR(from_open.ph, closed.ph, 1e-6);
    EXPECT_EQ(from_open.phase_amount.size(), chemistry->phases.size());
  }
}

}  // namespace
}  // namespace leat::test
