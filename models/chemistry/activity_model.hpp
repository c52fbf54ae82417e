#pragma once
#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace leat {

// What an activity model may know of a dissolved species.
struct ActivitySpecies {
  std::string name;
  double charge = 0;  // [1]
};

// A linear functional of the molalities, s = sum_i c_i m_i, that a model depends on (ionic strength, sum of
// molalities, the molality of one ion ...). The equilibrium equations carry ln s as an unknown, so that a model's
// derivatives with respect to its arguments are all that the exact Jacobian needs.
struct ActivityArgument {
  std::string name;
  std::vector<double> coefficient;  // one per species; not negative [1]
};

// What the equations take from the surroundings of a model.
struct ActivityConditions {
  double temperature = 298.15;      // [K]
  double debye_huckel_a = 0.5100;   // A of log10 gamma, molal scale, at that temperature [kg^0.5 mol^-0.5]
  double water_molar_mass = 0.018015;  // [kg/mol]
};

// Output of one evaluation: natural logarithms and their derivatives with respect to ln s of each argument.
struct ActivityValues {
  std::span<double> ln_gamma;      // per species [1]
  std::span<double> dln_gamma;     // species x arguments, row-major: d ln gamma_i / d ln s_k [1]
  double ln_water = 0;             // ln activity of water [1]
  std::span<double> dln_water;     // per argument: d ln a_w / d ln s_k [1]
};

// Contract of an activity model. Beyond its range a model is evaluated with its arguments held at the end of the
// range (derivative zero there): otherwise the equations may have no solution, or several. Results are flagged.
class ActivityModel {
 public:
  virtual ~ActivityModel() = default;
  virtual std::string_view name() const = 0;
  virtual std::string_view source() const = 0;  // publication of the equation
  // The first argument is always the ionic strength, 0.5 sum z^2 m.
  virtual std::vector<ActivityArgument> arguments(std::span<const ActivitySpecies> species) const = 0;
  virtual void evaluate(std::span<const ActivitySpecies> species, const ActivityConditions& at,
                        std::span<const double> s, ActivityValues& out) const = 0;
  virtual double largest_ionic_strength() const = 0;  // end of the range [mol/kg]
};

}  // namespace leat
