// What every solved liquor must obey, on seeded random liquors: balances, mass action, saturation; one answer however it is
// asked for; finite answers at the edge of what can be asked.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <cstring>
#include <limits>
#include <numeric>

#include "tests/support/beaker.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

constexpr double room = 298.15;     // [K]
constexpr double rounding = 2.2e-16;

struct Model {
  const char* name;
  std::shared_ptr<const Chemistry> chemistry;
};
const std::vector<Model>& models() {
  static const std::vector<Model> both = {{"davies", leach_chemistry(davies_activity())}, {"ideal", leach_chemistry(ideal_activity())}};
  return both;
}

// How far a molality may move: 1e-10 of itself, and what four roundings of each total do to it. Both are blown up by the same
// sensitivities, without which a titration near its end would never pass.
class Allowance {
 public:
  Allowance(EquilibriumSolver& solver, const std::vector<double>& totals, const EquilibriumState& state) {
    const Chemistry& c = solver.chemistry();
    std::vector<double> gradient(totals.size());
    solver.linearise(totals, room, state);
    const auto moved = [&](const Probe& probe) {
      const double value = solver.probe(probe, gradient);
      double sum = 1e-10 * std::abs(value);
      for (std::size_t j = 0; j < totals.size(); ++j) sum += 4 * rounding * std::abs(gradient[j] * totals[j]);
      return sum;
    };
    for (std::size_t i = 0; i < c.species.size(); ++i) molality.push_back(moved({ProbeKind::molality, static_cast<int>(i)}));
    for (std::size_t s = 0; s < c.phases.size(); ++s) amount.push_back(moved({ProbeKind::formed, static_cast<int>(s)}));
  }
  std::vector<double> molality, amount;
};

// Largest departure of one state from another in units of what is allowed; species and phases matched by name, amounts of the other
// divided by `factor`.
double departure(const Allowance& allowed, const Chemistry& chemistry, const EquilibriumState& state, const Chemistry& other_chemistry,
                 const EquilibriumState& other, double factor, std::string& worst) {
  double largest = 0;
  const auto take = [&](double difference, double allowance, const std::string& name) {
    const double ratio = std::abs(difference) / std::max(allowance, 1e-300);
    if (!(ratio <= largest)) largest = ratio, worst = name;
  };
  for (std::size_t i = 0; i < chemistry.species.size(); ++i)
    take(other.molality[other_chemistry.find_species(chemistry.species[i].name)] - state.molality[i], allowed.molality[i], chemistry.species[i].name);
  for (std::size_t s = 0; s < chemistry.phases.size(); ++s) {
    const double amount = other.phase_amount[other_chemistry.find_phase(chemistry.phases[s].name)] / factor;
    // A solid may be in or out at its first trace.
    take(amount - state.phase_amount[s], allowed.amount[s] + 1e-12, chemistry.phases[s].name);
  }
  return largest;
}

TEST(equilibrium, random_liquors_close_and_obey_gibbs) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    EquilibriumSolver solver(model.chemistry);
    BeakerMaker maker(c, 20260);
    double balance = 0, mass_action = 0, charge = 0, omega = -1;
    for (int turn = 0; turn < 3000; ++turn) {
      const std::vector<double> totals = maker.next();
      EquilibriumState state;
      const SolveReport report = solver.solve_cold(totals, room, state);
      ASSERT_TRUE(report.ok) << model.name << " liquor " << turn << ": " << report.message << ", " << report.worst;
      const EquilibriumSolver::Closure closure = solver.closure(totals, room, state);
      EXPECT_LE(closure.balance, 1e-12) << model.name << " liquor " << turn;
      EXPECT_LE(closure.mass_action, 1e-10) << model.name << " liquor " << turn;
      balance = std::max(balance, closure.balance);
      mass_action = std::max(mass_action, closure.mass_action);
      charge = std::max(charge, closure.charge);
      for (std::size_t s = 0; s < c.phases.size(); ++s) {
        const bool active = std::find(state.active.begin(), state.active.end(), static_cast<int>(s)) != state.active.end();
        EXPECT_GE(state.phase_amount[s], 0);
        if (active) {
          EXPECT_NEAR(state.log10_omega[s], 0, 1e-10) << c.phases[s].name;
          continue;
        }
        EXPECT_EQ(state.phase_amount[s], 0) << c.phases[s].name;
        if (c.phases[s].may_form) {
          EXPECT_LE(state.log10_omega[s], 1e-9) << model.name << " liquor " << turn << " " << c.phases[s].name;
          omega = std::max(omega, state.log10_omega[s]);
        }
      }
    }
    std::printf("%s: balance %.1e, mass action %.1e, charge %.1e, inactive log10 omega up to %.1e\n", model.name, balance, mass_action, charge, omega);
  }
}

TEST(equilibrium, both_finishes_agree) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    EquilibriumSolver own(model.chemistry), kinsol(model.chemistry, Finish::kinsol);
    BeakerMaker maker(c, 20260);
    double largest = 0;
    for (int turn = 0; turn < 3000; ++turn) {
      const std::vector<double> totals = maker.next();
      EquilibriumState state, other;
      ASSERT_TRUE(own.solve_cold(totals, room, state).ok) << model.name << " liquor " << turn;
      const SolveReport report = kinsol.solve_cold(totals, room, other);
      EXPECT_TRUE(report.ok) << model.name << " liquor " << turn << ": " << report.message << ", " << report.worst << " " << report.largest_residual;
      if (!report.ok) continue;
      std::string worst;
      const double ratio = departure(Allowance(own, totals, state), c, state, c, other, 1, worst);
      EXPECT_LE(ratio, 1) << model.name << " liquor " << turn << " " << worst;
      largest = std::max(largest, ratio);
    }
    std::printf("%s: largest departure %.2g of what is allowed\n", model.name, largest);
  }
}

TEST(equilibrium, order_of_the_library_does_not_matter) {
  std::mt19937_64 random(5);
  SpeciesLibrary library = embedded_library();
  std::shuffle(library.components.begin(), library.components.end(), random);
  std::shuffle(library.species.begin(), library.species.end(), random);
  std::shuffle(library.solids.begin(), library.solids.end(), random);
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    const auto shuffled = leach_chemistry(library, model.chemistry->activity);
    ASSERT_EQ(shuffled->species.size(), c.species.size());
    ASSERT_EQ(shuffled->phases.size(), c.phases.size());
    EquilibriumSolver solver(model.chemistry), other(shuffled);
    BeakerMaker maker(c, 31);
    double largest = 0;
    for (int turn = 0; turn < 600; ++turn) {
      const std::vector<double> totals = maker.next();
      std::vector<double> moved(totals.size());
      for (std::size_t j = 0; j < totals.size(); ++j) moved[shuffled->find_component(c.component_names[j])] = totals[j];
      EquilibriumState state, second;
      ASSERT_TRUE(solver.solve_cold(totals, room, state).ok) << turn;
      ASSERT_TRUE(other.solve_cold(moved, room, second).ok) << turn;
      std::string worst;
      const double ratio = departure(Allowance(solver, totals, state), c, state, *shuffled, second, 1, worst);
      EXPECT_LE(ratio, 1) << model.name << " liquor " << turn << " " << worst;
      largest = std::max(largest, ratio);
    }
    std::printf("%s: largest departure %.2g of what is allowed\n", model.name, largest);
  }
}

TEST(equilibrium, size_does_not_matter) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    EquilibriumSolver solver(model.chemistry);
    BeakerMaker maker(c, 32);
    double largest = 0;
    for (int turn = 0; turn < 150; ++turn) {
      const std::vector<double> totals = maker.next();
      EquilibriumState state;
      ASSERT_TRUE(solver.solve_cold(totals, room, state).ok) << turn;
      const Allowance allowed(solver, totals, state);
      for (double factor : {1e-6, 1e-3, 7.0, 1e3, 1e6}) {
        std::vector<double> scaled = totals;
        for (double& total : scaled) total *= factor;
        EquilibriumState second;
        ASSERT_TRUE(solver.solve_cold(scaled, room, second).ok) << turn;
        std::string worst;
        const double ratio = departure(allowed, c, state, c, second, factor, worst);
        EXPECT_LE(ratio, 1) << model.name << " liquor " << turn << " times " << factor << " " << worst;
        largest = std::max(largest, ratio);
        EXPECT_NEAR(second.solvent, factor * state.solvent, 1e-10 * factor * state.solvent);
      }
    }
    std::printf("%s: largest departure %.2g of what is allowed\n", model.name, largest);
  }
}

TEST(equilibrium, a_feed_in_two_parts_is_their_sum) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    EquilibriumSolver solver(model.chemistry);
    BeakerMaker maker(c, 33);
    std::mt19937_64 random(34);
    std::uniform_real_distribution<double> unit(0, 1);
    double largest = 0;
    for (int turn = 0; turn < 300; ++turn) {
      const std::vector<double> totals = maker.next();
      std::vector<double> sum = totals;
      for (double& total : sum) {
        const double part = total * unit(random);
        const double rest = total - part;
        total = part + rest;
      }
      EquilibriumState state, second;
      ASSERT_TRUE(solver.solve_cold(totals, room, state).ok) << turn;
      const Allowance allowed(solver, totals, state);
      ASSERT_TRUE(solver.solve_cold(sum, room, second).ok) << turn;
      std::string worst;
      const double ratio = departure(allowed, c, state, c, second, 1, worst);
      EXPECT_LE(ratio, 1) << model.name << " liquor " << turn << " " << worst;
      largest = std::max(largest, ratio);
    }
    std::printf("%s: largest departure %.2g of what is allowed\n", model.name, largest);
  }
}

bool same_bits(const std::vector<double>& a, const std::vector<double>& b) {
  return a.size() == b.size() && (a.empty() || std::memcmp(a.data(), b.data(), a.size() * sizeof(double)) == 0);
}

// Whatever a solver has solved before, and in whichever instance.
TEST(equilibrium, answers_repeat_to_the_bit) {
  for (const Model& model : models())
    for (const Finish finish : {Finish::own, Finish::kinsol}) {
      BeakerMaker maker(*model.chemistry, 35);
      EquilibriumSolver solver(model.chemistry, finish);
      std::vector<std::vector<double>> liquors;
      std::vector<EquilibriumState> first;
      for (int turn = 0; turn < 90; ++turn) {
        liquors.push_back(maker.next());
        first.emplace_back();
        solver.solve_cold(liquors.back(), room, first.back());
      }
      for (int turn = 89; turn >= 0; --turn) {
        EquilibriumState again, fresh;
        solver.solve_cold(liquors[turn], room, again);
        EquilibriumSolver(model.chemistry, finish).solve_cold(liquors[turn], room, fresh);
        for (const EquilibriumState* state : {&again, &fresh}) {
          EXPECT_EQ(state->solved, first[turn].solved);
          EXPECT_TRUE(same_bits(state->x, first[turn].x)) << model.name << " liquor " << turn;
          EXPECT_TRUE(same_bits(state->molality, first[turn].molality)) << model.name << " liquor " << turn;
          EXPECT_TRUE(same_bits(state->phase_amount, first[turn].phase_amount)) << model.name << " liquor " << turn;
          EXPECT_EQ(state->active, first[turn].active);
        }
      }
    }
}

// From a neighbour 2 percent away, and from far.
TEST(equilibrium, a_warm_start_finds_the_cold_answer) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    EquilibriumSolver solver(model.chemistry);
    BeakerMaker maker(c, 36);
    double largest = 0;
    EquilibriumState far;
    for (int turn = 0; turn < 500; ++turn) {
      const std::vector<double> before = maker.next();
      const std::vector<double> totals = maker.near(before, 0.02);
      EquilibriumState warm, cold;
      ASSERT_TRUE(solver.solve_cold(before, room, warm).ok) << turn;
      ASSERT_TRUE(solver.solve(totals, room, warm).ok) << turn;
      ASSERT_TRUE(solver.solve_cold(totals, room, cold).ok) << turn;
      ASSERT_TRUE(solver.solve(totals, room, far).ok) << turn;
      Allowance allowed(solver, totals, cold);
      for (std::size_t i = 0; i < c.species.size(); ++i) allowed.molality[i] += 9e-10 * cold.molality[i];
      for (std::size_t s = 0; s < c.phases.size(); ++s) allowed.amount[s] += 9e-10 * cold.phase_amount[s];
      for (const EquilibriumState* state : {&warm, &far}) {
        std::string worst;
        const double ratio = departure(allowed, c, cold, c, *state, 1, worst);
        EXPECT_LE(ratio, 1) << model.name << " liquor " << turn << " " << worst << (state == &far ? " from far" : "");
        largest = std::max(largest, ratio);
      }
    }
    std::printf("%s: largest departure %.2g of what is allowed\n", model.name, largest);
  }
}

TEST(equilibrium, absent_and_slightly_negative_totals_give_finite_answers) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    EquilibriumSolver solver(model.chemistry);
    BeakerMaker maker(c, 37);
    for (int turn = 0; turn < 60; ++turn) {
      const std::vector<double> totals = maker.next();
      for (int j = 0; j < c.component_count(); ++j)
        for (double value : {1e-20, 0.0, -1e-20, -1e-12}) {
          if (j == c.hydrogen) continue;
          std::vector<double> changed = totals;
          changed[j] = value;
          changed[c.hydrogen] += (totals[j] - value) * c.component_charge[j];
          EquilibriumState state;
          const SolveReport report = solver.solve_cold(changed, room, state);
          ASSERT_TRUE(report.ok) << model.name << " liquor " << turn << " " << c.component_names[j] << " " << value << ": " << report.message;
          for (double molality : state.molality) EXPECT_TRUE(std::isfinite(molality) && molality >= 0);
          for (double amount : state.phase_amount) EXPECT_TRUE(std::isfinite(amount) && amount >= 0);
          for (double omega : state.log10_omega) EXPECT_TRUE(std::isfinite(omega));
          EXPECT_TRUE(std::isfinite(state.ph) && std::isfinite(state.ionic_strength) && std::isfinite(state.solvent));
          changed[j] = std::max(value, 0.0);  // less than nothing counts as nothing
          EXPECT_LE(solver.closure(changed, room, state).balance, 1e-11) << model.name << " liquor " << turn << " " << c.component_names[j] << " " << value;
        }
    }
  }
}

TEST(equilibrium, nothing_at_all_is_water) {
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    std::vector<double> totals(c.component_names.size(), 0.0);
    totals.back() = 55.508;
    EquilibriumState state;
    ASSERT_TRUE(EquilibriumSolver(model.chemistry).solve_cold(totals, room, state).ok);
    EXPECT_NEAR(state.ph, 6.9975, 1e-3);  // half of pKw 13.995
    EXPECT_NEAR(state.solvent, 1, 1e-4);
  }
}

TEST(equilibrium, what_is_no_liquor_is_refused_with_a_message) {
  const double nan = std::numeric_limits<double>::quiet_NaN(), infinite = std::numeric_limits<double>::infinity();
  for (const Model& model : models()) {
    const Chemistry& c = *model.chemistry;
    for (const Finish finish : {Finish::own, Finish::kinsol}) {
      EquilibriumSolver solver(model.chemistry, finish);
      BeakerMaker maker(c, 38);
      const std::vector<double> totals = maker.next();
      EquilibriumState good;
      ASSERT_TRUE(solver.solve_cold(totals, room, good).ok);
      const auto refused = [&](int j, double value) {
        std::vector<double> changed = totals;
        changed[j] = value;
        EquilibriumState cold, warm = good;
        for (const bool from_cold : {true, false}) {
          const SolveReport report = from_cold ? solver.solve_cold(changed, room, cold) : solver.solve(changed, room, warm);
          EXPECT_FALSE(report.ok) << j << " " << value;
          EXPECT_FALSE(report.message.empty()) << j << " " << value;
          EXPECT_FALSE((from_cold ? cold : warm).solved);
        }
      };
      for (double value : {0.0, -1.0, nan, infinite}) refused(c.water(), value);
      for (int j = 0; j < c.component_count(); ++j)
        for (double value : {nan, infinite, -infinite, 1e6}) refused(j, value);
      EquilibriumState after;  // and the solver is as good as before
      ASSERT_TRUE(solver.solve_cold(totals, room, after).ok);
      EXPECT_TRUE(same_bits(after.x, good.x));
    }
  }
}

}  // namespace
}  // namespace leat::test
