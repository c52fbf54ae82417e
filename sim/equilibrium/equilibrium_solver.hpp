#pragma once
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "models/chemistry/equilibrium_system.hpp"
#include "models/chemistry/probe.hpp"
#include "sim/numerics/solve_report.hpp"

namespace leat {

// One solved cell. Molalities are per kilogram of solvent water; amounts of phases are in mol for the totals given.
struct EquilibriumState {
  bool solved = false;
  std::vector<double> x;              // unknowns of EquilibriumSystem: head, then one per active phase
  std::vector<int> active;            // active phases, ascending
  std::vector<double> molality;       // per species [mol/kg]
  std::vector<double> phase_amount;   // per solid, then reservoirs [mol]
  std::vector<double> log10_omega;    // per solid: log10 of the saturation ratio [log10]
  double solvent = 0;                 // water that is solvent [kg]
  double ionic_strength = 0;          // [mol/kg]
  double ph = 0;                      // -log10 activity of H+
  double water_activity = 1;          // [1]
};

enum class Finish { own, kinsol };  // who does the last Newton iterations

// Solves EquilibriumSystem from any start: component sweeps, a convex phase at frozen activity with solids as steep
// pseudo-species, then Newton's method on the exact equations with an active set. One per thread; no heap after
// set-up but for a growing set of phases. Method: numerics of Carrayrou, Mose and Behra (2002) for the sweeps,
// convexity of the Gibbs energy at frozen activity for the rest.
class EquilibriumSolver {
 public:
  explicit EquilibriumSolver(std::shared_ptr<const Chemistry> chemistry, Finish finish = Finish::own);
  ~EquilibriumSolver();
  EquilibriumSolver(EquilibriumSolver&&) noexcept;

  // totals [mol], water last; temperature [K]. Starts from `state` where it is solved, cold otherwise or on failure.
  SolveReport solve(std::span<const double> totals, double temperature, EquilibriumState& state,
                    const std::vector<Reservoir>& held = {});
  // Ignores what `state` holds.
  SolveReport solve_cold(std::span<const double> totals, double temperature, EquilibriumState& state,
                         const std::vector<Reservoir>& held = {});

  // Value of a probe and its total derivative with respect to the totals (water last; [unit/mol]) at a state that
  // `linearise` was called for; one transposed solve each.
  bool linearise(std::span<const double> totals, double temperature, const EquilibriumState& state);
  double probe(const Probe& probe, std::span<double> gradient);
  // The value alone, without linearising.
  double probe_value(const Probe& probe, std::span<const double> totals, double temperature, const EquilibriumState& state);

  // Checked afresh from molalities: worst relative imbalance of a component and worst |ln IAP - ln K|.
  struct Closure {
    double balance = 0;      // relative [1]
    double mass_action = 0;  // [ln]
    double charge = 0;       // |sum z m| / sum |z| m [1]
  };
  Closure closure(std::span<const double> totals, double temperature, const EquilibriumState& state);

  const Chemistry& chemistry() const;
  int iterations_total() const;  // Newton iterations since construction, for benchmarks

 private:
  struct Work;
  std::unique_ptr<Work> work_;
};

}  // namespace leat
