#pragma once
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "models/chemistry/chemistry.hpp"

namespace leat {

// A phase of fixed activity whose amount may have either sign: a bare proton held at a pH, or a gas held at a
// fugacity. Only beakers have them; the amount exchanged is a result.
struct Reservoir {
  std::string name;
  std::vector<Share> shares;
  double water = 0;        // coefficient of H2O [1]
  double ln_activity = 0;  // held value of sum a lambda + a_w ln a_w [1]
};

// The equations of one well-mixed liquor with its solids at local equilibrium, per kilogram of all its water, and
// their Jacobian. No loop and no solver here.
//   unknowns  x = [ ln activity of each component | ln of each activity argument | w = ln kg solvent | nu of each active phase ]
//   component j:  e^w sum_i a_ij m_i + sum_s a_sj sigma_s nu_s = T_j
//   argument k:   ln sum_i c_ki m_i - ln s_k = 0
//   water:        e^w (1/M_w + sum_i a_iw m_i) + sum_s a_sw sigma_s nu_s = 1/M_w
//   phase s:      sum_j a_sj lambda_j + a_sw ln a_w - ln K_s = 0
//   with          ln m_i = ln K_i + sum_j a_ij lambda_j + a_iw ln a_w - ln gamma_i
// A component row is ln(P/N) of its positive and negative terms, or 2 (P - N)/(P + N) once phases carry more than a
// tenth of it (a log row is concave in the amounts of solids). Totals under 1e-14 mol/kg are held there.
class EquilibriumSystem {
 public:
  explicit EquilibriumSystem(std::shared_ptr<const Chemistry> chemistry);

  const Chemistry& chemistry() const { return *chemistry_; }
  int components() const { return components_; }
  int arguments() const { return arguments_; }
  int phases() const { return static_cast<int>(phase_shares_.size()); }  // solids, then reservoirs
  int solids() const { return solids_; }
  int head() const { return components_ + arguments_ + 1; }              // unknowns before the phases

  void set_temperature(double temperature);                     // [K]
  void set_reservoirs(const std::vector<Reservoir>& held);
  // Totals [mol], water last; scaled to one kilogram of all water inside. False if there is no water or a value is
  // not finite.
  bool set_totals(std::span<const double> totals);
  double scale() const { return scale_; }                       // kg of all water [kg]
  double total(int j) const { return totals_[j]; }              // as seen by the equations [mol/kg]
  bool held_at_floor(int j) const { return floored_[j]; }
  double sigma(int phase) const { return sigma_[phase]; }       // scale of the phase's amount [mol/kg]

  // Evaluates all species at x; the state is kept for the calls below. False if a value is not finite.
  bool evaluate(std::span<const double> x, std::span<const int> active);
  void residual(std::span<const double> x, std::span<const int> active, std::span<double> f);
  // Column-major n x n, n = head() + active.size(), after evaluate and residual at the same x.
  void jacobian(std::span<const double> x, std::span<const int> active, std::span<double> matrix);
  // d f_j / d T_j of component rows at the last residual [kg/mol].
  double row_weight(int j) const { return row_weight_[j]; }

  std::span<const double> molality() const { return molality_; }      // [mol/kg solvent]
  std::span<const double> ln_gamma() const { return ln_gamma_; }
  double ln_water() const { return ln_water_; }
  std::span<const double> dln_gamma() const { return dln_gamma_; }
  std::span<const double> dln_water() const { return dln_water_; }
  double ln_k(int species) const { return ln_k_[species]; }
  double phase_ln_k(int phase) const { return phase_ln_k_[phase]; }
  std::span<const Share> species_shares(int species) const;
  double species_water(int species) const { return species_water_[species]; }
  std::span<const Share> phase_shares(int phase) const { return phase_shares_[phase]; }
  double phase_water(int phase) const { return phase_water_[phase]; }
  double ln_omega(int phase, std::span<const double> x) const;        // saturation, natural logarithm
  void activity_at(std::span<const double> ln_arguments);             // ln gamma and ln a_w alone
  std::string equation_name(int row, std::span<const int> active) const;
  double water_per_kilogram() const { return water_per_kilogram_; }   // 1/M_w [mol/kg]
  double argument_coefficient(int k, int species) const { return argument_rows_[k].coefficient[species]; }

 private:
  std::shared_ptr<const Chemistry> chemistry_;
  int components_ = 0, arguments_ = 0, species_count_ = 0, solids_ = 0;
  std::vector<Share> shares_;               // all species' shares, one after the other
  std::vector<int> share_begin_;            // per species, with an end
  std::vector<double> species_water_;
  std::vector<ActivityArgument> argument_rows_;
  std::vector<std::vector<Share>> phase_shares_;
  std::vector<double> phase_water_, phase_ln_k_, sigma_;
  std::vector<double> ln_k_, molality_, ln_gamma_, dln_gamma_, dln_water_, argument_values_;
  std::vector<double> totals_, positive_, negative_, row_weight_, argument_sum_, row_scale_;
  std::vector<bool> floored_, plain_;
  ActivityConditions conditions_;
  double ln_water_ = 0, scale_ = 1, solvent_ = 1, water_per_kilogram_ = 55.5;
  double temperature_ = -1;
};

}  // namespace leat
