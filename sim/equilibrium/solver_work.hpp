#pragma once
// The inside of EquilibriumSolver, shared by the sources of this room only.
#include <Eigen/LU>
#include <algorithm>
#include <map>
#include <vector>

#include "models/core/check.hpp"
#include "sim/equilibrium/convex_phase.hpp"
#include "sim/equilibrium/equilibrium_solver.hpp"
#include "sim/numerics/kinsol.hpp"

namespace leat {

// The exact equations for a fixed active set, as KINSOL sees them.
class FixedSetProblem final : public NonlinearProblem {
 public:
  EquilibriumSystem* system = nullptr;
  std::vector<int> active;
  int size() const override { return system->head() + static_cast<int>(active.size()); }
  bool residual(std::span<const double> x, std::span<double> f) override {
    if (!system->evaluate(x, active)) return false;
    system->residual(x, active, f);
    return true;
  }
  bool jacobian(std::span<const double> x, std::span<double> values) override {
    if (!system->evaluate(x, active)) return false;
    scratch_.resize(x.size());
    system->residual(x, active, scratch_);
    system->jacobian(x, active, values);
    return true;
  }
  std::string equation_name(int row) const override { return system->equation_name(row, active); }

 private:
  std::vector<double> scratch_;
};

struct EquilibriumSolver::Work {
  EquilibriumSystem system;
  ConvexPhase convex;
  Finish finish;
  FixedSetProblem problem;
  std::map<int, KinsolSolver> kinsol;  // by number of unknowns
  CellMatrix jacobian;
  CellVector step;
  Eigen::PartialPivLU<CellMatrix> lu;
  std::vector<double> x, f, trial, before;
  std::vector<int> active;
  std::vector<Reservoir> held;  // of the last solve
  int newton_total = 0;

  // linearised state
  const EquilibriumState* at = nullptr;
  std::vector<double> totals;
  double temperature = 0;

  Work(std::shared_ptr<const Chemistry> chemistry, Finish how) : system(std::move(chemistry)), convex(system), finish(how) {
    check(system.head() + system.phases() < most_unknowns, "too many unknowns in one cell");
    problem.system = &system;
    x.reserve(most_unknowns);
    f.reserve(most_unknowns);
    trial.reserve(most_unknowns);
  }

  // Of a component held at the floor the equations see a trace that is not there: a species that contains it counts in
  // proportion to what is. Returns the component, or -1; `share` is what is there over the floor [1].
  int floored_component(int species, std::span<const double> amounts, double& share) const {
    for (const Share& one : system.species_shares(species))
      if (one.coefficient > 0 && system.held_at_floor(one.component)) {
        share = std::max(0.0, amounts[one.component]) / (system.total(one.component) * system.scale());
        return one.component;
      }
    share = 1;
    return -1;
  }

  int size() const { return system.head() + static_cast<int>(active.size()); }

  bool factor();

  double shortened(double cap, double residual);

  // `careful`: shorter steps, taken back by half while they make the worst residual five times larger.
  SolveReport newton_own(bool careful = false);

  SolveReport newton_kinsol();

  // Newton with phases dropped and added one at a time until Gibbs' conditions hold.
  SolveReport settle(bool own, bool careful = false);

  // Stage after stage of steeper pseudo-species, each from the last; after the third, and after each later one, the exact
  // equations are tried with the solids identified so far.
  SolveReport cold();

  SolveReport from_convex(bool careful);

  void keep(EquilibriumState& state);
};

}  // namespace leat
