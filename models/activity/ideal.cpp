#include "models/activity/ideal.hpp"

#include <algorithm>
#include <limits>

namespace leat {
namespace {

class Ideal final : public ActivityModel {
 public:
  std::string_view name() const override { return "ideal"; }
  std::string_view source() const override { return "definition of the ideal dilute solution"; }
  std::vector<ActivityArgument> arguments(std::span<const ActivitySpecies> species) const override {
    return ionic_strength_and_sum(species);
  }
  void evaluate(std::span<const ActivitySpecies>, const ActivityConditions& at, std::span<const double> s,
                ActivityValues& out) const override {
    std::fill(out.ln_gamma.begin(), out.ln_gamma.end(), 0.0);
    std::fill(out.dln_gamma.begin(), out.dln_gamma.end(), 0.0);
    out.ln_water = -at.water_molar_mass * s[1];
    out.dln_water[0] = 0;
    out.dln_water[1] = out.ln_water;
  }
  double largest_ionic_strength() const override { return std::numeric_limits<double>::infinity(); }
};

}  // namespace

std::vector<ActivityArgument> ionic_strength_and_sum(std::span<const ActivitySpecies> species) {
  std::vector<ActivityArgument> arguments = {{"ionic strength", {}}, {"sum of molalities", {}}};
  for (const ActivitySpecies& one : species) {
    arguments[0].coefficient.push_back(0.5 * one.charge * one.charge);
    arguments[1].coefficient.push_back(1);
  }
  return arguments;
}

std::unique_ptr<ActivityModel> make_ideal_activity() { return std::make_unique<Ideal>(); }

}  // namespace leat
