#pragma once
#include <vector>

#include "models/chemistry/chemistry.hpp"
#include "models/process/lot.hpp"

namespace leat {

// How the contents of a vessel [mol] or the flow of a stream [mol/s] stand in a vector:
// components (formed solids counted in) | water | lots.
struct PulpLayout {
  int components = 0;  // without water
  int lots = 0;
  int water() const { return components; }
  int lot(int k) const { return components + 1 + k; }
  int size() const { return components + 1 + lots; }
};

// What every unit of one circuit shares. Outlives the units.
struct ProcessContext {
  const Chemistry* chemistry = nullptr;
  std::vector<Lot> lots;
  PulpLayout layout;
};

}  // namespace leat
