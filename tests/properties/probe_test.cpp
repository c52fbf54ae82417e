// Gradients of everything that can be asked of a solved liquor, against differences of solved neighbours.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "tests/support/beaker.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

constexpr double room = 298.15;  // [K]

std::vector<Probe> probes_of(const Chemistry& c, const EquilibriumState& state) {
  std::vector<Probe> probes = {{ProbeKind::liquor_volume, 0}, {ProbeKind::formed_volume, 0}, {ProbeKind::formed_mass, 0}};
  for (const char* name : {"H^+", "NH3", "Ag(NH3)2^+", "Cu(NH3)4^2+", "Cl^-", "HCO3^-", "HCN", "Zn(OH)3^-", "Ca(SO4)(aq)"}) {
    probes.push_back({ProbeKind::molality, c.find_species(name)});
    probes.push_back({ProbeKind::concentration, c.find_species(name)});
  }
  for (int j = 0; j < c.component_count(); ++j) probes.push_back({ProbeKind::total, j});
  for (std::size_t s = 0; s < c.phases.size(); ++s) {
    const int phase = static_cast<int>(s);
    const bool active = std::find(state.active.begin(), state.active.end(), phase) != state.active.end();
    probes.push_back({active ? ProbeKind::formed : ProbeKind::saturation, phase});
  }
  return probes;
}

// What a probe is a difference of, where it is one: a dissolved total is what was fed less what has formed.
double scale_of(const Probe& probe, const EquilibriumState& state, const std::vector<double>& totals, double value) {
  return probe.kind == ProbeKind::total ? std::max(std::abs(value), std::abs(totals[probe.index]) / state.solvent * 1000) : std::abs(value);
}

// Steepest change of any component's activity, as a logarithm, with each total [1/mol].
std::vector<double> steepness(EquilibriumSolver& solver, const EquilibriumState& state, const std::vector<double>& totals) {
  std::vector<double> gradient(totals.size()), steepest(totals.size(), 0.0);
  for (int i = 0; i < solver.chemistry().component_count(); ++i) {
    solver.probe({ProbeKind::molality, i}, gradient);
    for (std::size_t j = 0; j < totals.size(); ++j) steepest[j] = std::max(steepest[j], std::abs(gradient[j]) / state.molality[i]);
  }
  return steepest;
}

// Four-point differences, of fourth order, with steps of a small part of the total that move no activity by more than a
// thousandth. A gradient must be met to 1e-6 of itself, beside what the noise of a solve does: every balance is met to 1e-13
// of its terms, which the liquor's own steepness magnifies.
TEST(probe, gradients_are_those_of_solved_neighbours) {
  int compared = 0, sharp = 0, liquors = 0;
  double largest = 0;
  for (const auto& activity : {davies_activity(), ideal_activity()}) {
    const auto chemistry = leach_chemistry(activity);
    const Chemistry& c = *chemistry;
    EquilibriumSolver solver(chemistry), other(chemistry);
    BeakerMaker maker(c, 51);
    for (int turn = 0; turn < 45; ++turn) {
      const std::vector<double> totals = maker.next();
      EquilibriumState state;
      ASSERT_TRUE(solver.solve_cold(totals, room, state).ok);
      ASSERT_TRUE(solver.linearise(totals, room, state));
      const std::vector<Probe> probes = probes_of(c, state);
      std::vector<double> values;
      std::vector<std::vector<double>> gradients(probes.size(), std::vector<double>(totals.size()));
      for (std::size_t p = 0; p < probes.size(); ++p) {
        values.push_back(solver.probe(probes[p], gradients[p]));
        const double alone = other.probe_value(probes[p], totals, room, state);
        EXPECT_NEAR(alone, values.back(), 1e-14 * std::abs(alone));
      }
      ++liquors;
      const std::vector<double> steepest = steepness(solver, state, totals);
      double unsure = 2e-12;  // relative, of anything solved [1]
      for (std::size_t j = 0; j + 1 < totals.size(); ++j) unsure += 1e-13 * steepest[j] * std::abs(totals[j]);
      for (int j = 0; j <= c.component_count(); ++j) {
        const double step = std::min(1e-3 * std::max(std::abs(totals[j]), 1e-6), 1e-3 / std::max(steepest[j], 1e-300));
        std::vector<double> difference(probes.size(), 0.0), size(probes.size(), 0.0);
        bool same_solids = true;
        for (const auto& [place, weight] : {std::pair{1, 8.0}, {-1, -8.0}, {2, -1.0}, {-2, 1.0}}) {
          std::vector<double> moved = totals;
          moved[j] += place * step;
          EquilibriumState neighbour = state;
          ASSERT_TRUE(other.solve(moved, room, neighbour).ok);
          same_solids = same_solids && neighbour.active == state.active;
          for (std::size_t p = 0; p < probes.size(); ++p) {
            const double value = other.probe_value(probes[p], moved, room, neighbour);
            difference[p] += weight * value / (12 * step);
            size[p] = std::max(size[p], scale_of(probes[p], state, totals, value));
          }
        }
        if (!same_solids) continue;
        for (std::size_t p = 0; p < probes.size(); ++p) {
          const double noise = unsure * size[p] / step;
          const double error = std::abs(difference[p] - gradients[p][j]);
          const double allowed = 1e-6 * std::abs(difference[p]) + noise + 1e-300;
          EXPECT_LE(error, allowed) << "kind " << static_cast<int>(probes[p].kind) << " index " << probes[p].index << " by " << c.component_names[j]
                                    << " in liquor " << turn << ": " << gradients[p][j] << " against " << difference[p];
          largest = std::max(largest, error / allowed);
          ++compared;
          sharp += noise < 1e-3 * std::abs(difference[p]);
        }
      }
    }
  }
  std::printf("%d gradients in %d liquors, %d of them well above the noise, largest departure %.2g of what is allowed\n", compared, liquors,
              sharp, largest);
  EXPECT_GT(sharp, 20000);
}

// To every digit that the liquor itself has: what is left in solution over a solid is a trace of what was fed.
TEST(probe, a_dissolved_total_is_the_sum_of_its_species) {
  const auto chemistry = leach_chemistry(davies_activity());
  const Chemistry& c = *chemistry;
  EquilibriumSolver solver(chemistry);
  BeakerMaker maker(c, 53);
  for (int turn = 0; turn < 300; ++turn) {
    const std::vector<double> totals = maker.next();
    EquilibriumState state;
    ASSERT_TRUE(solver.solve_cold(totals, room, state).ok);
    const double volume = solver.probe_value({ProbeKind::liquor_volume, 0}, totals, room, state);
    for (int j = 0; j < c.component_count(); ++j) {
      if (j == c.hydrogen) continue;  // a difference of acid and base by its nature
      double sum = 0;
      for (std::size_t i = 0; i < c.species.size(); ++i)
        for (const Share& share : c.species[i].shares)
          if (share.component == j) sum += share.coefficient * state.molality[i] * state.solvent;
      const double probed = solver.probe_value({ProbeKind::total, j}, totals, room, state);
      EXPECT_NEAR(probed, sum / volume, 1e-9 * sum / volume) << c.total_names[j] << " in liquor " << turn << ", fed " << totals[j] << " mol";
    }
  }
}

// Amounts grow with the liquor, contents do not: Euler's relation for every kind. Tolerance 1e-9 of the largest term.
TEST(probe, gradients_obey_euler) {
  const auto chemistry = leach_chemistry(davies_activity());
  EquilibriumSolver solver(chemistry);
  BeakerMaker maker(*chemistry, 52);
  for (int turn = 0; turn < 200; ++turn) {
    const std::vector<double> totals = maker.next();
    EquilibriumState state;
    ASSERT_TRUE(solver.solve_cold(totals, room, state).ok);
    ASSERT_TRUE(solver.linearise(totals, room, state));
    std::vector<double> gradient(totals.size());
    for (const Probe& probe : probes_of(*chemistry, state)) {
      const double value = solver.probe(probe, gradient);
      double sum = 0, largest = scale_of(probe, state, totals, value);
      for (std::size_t j = 0; j < totals.size(); ++j) {
        sum += gradient[j] * totals[j];
        largest = std::max(largest, std::abs(gradient[j] * totals[j]));
      }
      const bool amount = probe.kind == ProbeKind::formed || probe.kind == ProbeKind::liquor_volume || probe.kind == ProbeKind::formed_volume ||
                          probe.kind == ProbeKind::formed_mass;
      EXPECT_NEAR(sum, amount ? value : 0, 1e-9 * largest) << "kind " << static_cast<int>(probe.kind) << " index " << probe.index << " liquor " << turn;
    }
  }
}

}  // namespace
}  // namespace leat::test
