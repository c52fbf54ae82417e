#pragma once
#include <cmath>

#include "models/process/catalogue.hpp"

namespace leat::test {

// A value well inside a parameter's range, its default where it has one [the parameter's unit].
inline double middle(const ParameterSpec& spec) {
  if (spec.otherwise && !spec.required) return *spec.otherwise;
  if (spec.least > 0 && std::isfinite(spec.most)) return std::sqrt(spec.least * spec.most);
  return std::isfinite(spec.least) && std::isfinite(spec.most) ? (spec.least + spec.most) / 2 : 1;
}

}  // namespace leat::test
