#include "sim/equilibrium/equilibrium_solver.hpp"

#include "sim/equilibrium/solver_work.hpp"

namespace leat {

EquilibriumSolver::EquilibriumSolver(std::shared_ptr<const Chemistry> chemistry, Finish finish)
    : work_(std::make_unique<Work>(std::move(chemistry), finish)) {}
EquilibriumSolver::~EquilibriumSolver() = default;
EquilibriumSolver::EquilibriumSolver(EquilibriumSolver&&) noexcept = default;

const Chemistry& EquilibriumSolver::chemistry() const { return work_->system.chemistry(); }
int EquilibriumSolver::iterations_total() const { return work_->newton_total; }

SolveReport EquilibriumSolver::solve(std::span<const double> totals, double temperature, EquilibriumState& state,
                                     const std::vector<Reservoir>& held) {
  Work& w = *work_;
  w.at = nullptr;
  w.held = held;
  if (!state.solved) return solve_cold(totals, temperature, state, held);
  w.system.set_temperature(temperature);
  w.system.set_reservoirs(held);
  // A state of other held items is no start: its phases mean something else.
  if (!w.system.set_totals(totals) || static_cast<int>(state.phase_amount.size()) != w.system.phases())
    return solve_cold(totals, temperature, state, held);
  w.x = state.x;
  w.active = state.active;
  // Amounts are kept in units of sigma, which moved with the totals.
  for (std::size_t a = 0; a < w.active.size(); ++a)
    w.x[w.system.head() + a] = state.phase_amount[w.active[a]] / (w.system.sigma(w.active[a]) * w.system.scale());
  const SolveReport report = w.settle(w.finish == Finish::own);
  if (!report.ok) return solve_cold(totals, temperature, state, held);
  w.keep(state);
  return report;
}

SolveReport EquilibriumSolver::solve_cold(std::span<const double> totals, double temperature, EquilibriumState& state,
                                          const std::vector<Reservoir>& held) {
  Work& w = *work_;
  w.at = nullptr;
  w.held = held;
  w.system.set_temperature(temperature);
  w.system.set_reservoirs(held);
  state.solved = false;
  if (!w.system.set_totals(totals)) {
    SolveReport report;
    report.message = "the totals are not a liquor: no water, or an amount beyond 1000 mol per kg of water";
    return report;
  }
  SolveReport report = w.cold();
  if (report.ok) w.keep(state);
  return report;
}

}  // namespace leat
