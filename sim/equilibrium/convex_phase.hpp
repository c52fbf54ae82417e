#pragma once
#include <Eigen/Dense>
#include <vector>

#include "models/chemistry/equilibrium_system.hpp"

namespace leat {

constexpr int most_unknowns = 96;  // of one cell
using CellMatrix = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::ColMajor, most_unknowns, most_unknowns>;
using CellVector = Eigen::Matrix<double, Eigen::Dynamic, 1, Eigen::ColMajor, most_unknowns, 1>;

// The globalised part of a cold solve. At frozen activity the equilibrium minimises a convex function,
//   Phi = sum_i m_i - sum_j T_j lambda_j + pseudo-species of the solids,
// whose gradient is the balance of the components. Fast steps on the log form are taken while they help; the damped
// Newton step on Phi, which cannot get stuck, otherwise.
class ConvexPhase {
 public:
  explicit ConvexPhase(EquilibriumSystem& system);

  // Start: ln activity = ln total, pH 7, then sweeps over the components.
  void start();
  // Balances to max |ln(P/N)| < tolerance with solids n = sigma exp(steepness SI); activity stays as it is.
  bool converge(double steepness, double tolerance);
  // Takes the activity, ionic strength and solvent water from the present point.
  void update_activity();

  std::vector<double> lambda;         // ln activity of each component
  std::vector<double> ln_argument;    // of the activity model
  double w = 0;                       // ln kg of solvent
  double phase_amount(int phase) const { return amount_[phase]; }  // [mol/kg of all water]
  int evaluations = 0;

 private:
  void species();                     // amounts of all species and pseudo-species at lambda
  double balance();                   // rows and their max norm
  void sweep();
  void assemble(bool log_form);

  EquilibriumSystem& system_;
  std::vector<double> molality_, base_, amount_, positive_, negative_, row_;
  std::vector<std::vector<int>> species_of_;  // species that contain a component
  std::vector<double> trial_, gradient_;
  double steepness_ = 1;
  CellMatrix matrix_;
  CellVector rhs_;
};

}  // namespace leat
