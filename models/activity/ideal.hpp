#pragma once
#include <memory>

#include "models/chemistry/activity_model.hpp"

namespace leat {

// Ideal dilute solution: ln gamma = 0, ln a_w = -M_w sum m (Raoult's law to first order).
std::unique_ptr<ActivityModel> make_ideal_activity();

// Ionic strength and sum of molalities: the two arguments of every model without ion-specific terms.
std::vector<ActivityArgument> ionic_strength_and_sum(std::span<const ActivitySpecies> species);

}  // namespace leat
