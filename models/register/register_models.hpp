#pragma once
#include "models/process/catalogue.hpp"

namespace leat {

// The catalogue of all models. To add one: write its pair of files in models/activity, models/rates or models/units,
// include its header in register_models.cpp and add its line there; nothing else.
Catalogue register_models();

}  // namespace leat
