#pragma once
#include <string>
#include <vector>

#include "sim/results/result_set.hpp"

namespace leat {

// One case of a ladder whose constants are listed.
struct ConstantsOf {
  const ResultSet* results;
  std::string series;
  std::size_t rung;  // from 1
};

// The constants of several cases as the axis and items `constant...` of one file: a constant with one value once; one with
// several a row each, labelled `NAME (series)`, or `NAME (series, rung N)` where a series has several.
void add_constants(ResultSet& set, const std::vector<ConstantsOf>& cases);

}  // namespace leat
