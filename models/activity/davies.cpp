#include "models/activity/davies.hpp"

#include <cmath>

#include "models/activity/ideal.hpp"

namespace leat {
namespace {

constexpr double end_of_range = 1.0;  // ionic strength [mol/kg]

class Davies final : public ActivityModel {
 public:
  std::string_view name() const override { return "davies"; }
  std::string_view source() const override { return "C. W. Davies, Ion Association, Butterworths 1962"; }
  std::vector<ActivityArgument> arguments(std::span<const ActivitySpecies> species) const override {
    return ionic_strength_and_sum(species);
  }
  void evaluate(std::span<const ActivitySpecies> species, const ActivityConditions& at, std::span<const double> s,
                ActivityValues& out) const override {
    const bool held = s[0] >= end_of_range;
    const double strength = held ? end_of_range : s[0];
    const double root = std::sqrt(strength);
    const double scale = -at.debye_huckel_a * std::log(10.0);
    const double unit_charge = scale * (root / (1 + root) - 0.3 * strength);
    // d/d ln I of the bracket: I (1/(2 sqrt I (1 + sqrt I)^2) - 0.3)
    const double slope = held ? 0 : scale * (0.5 * root / ((1 + root) * (1 + root)) - 0.3 * strength);
    for (std::size_t i = 0; i < species.size(); ++i) {
      const double square = species[i].charge * species[i].charge;
      out.ln_gamma[i] = square * unit_charge;
      out.dln_gamma[2 * i] = square * slope;
      out.dln_gamma[2 * i + 1] = 0;
    }
    out.ln_water = -at.water_molar_mass * s[1];
    out.dln_water[0] = 0;
    out.dln_water[1] = out.ln_water;
  }
  double largest_ionic_strength() const override { return end_of_range; }
};

}  // namespace

std::unique_ptr<ActivityModel> make_davies_activity() { return std::make_unique<Davies>(); }

}  // namespace leat
