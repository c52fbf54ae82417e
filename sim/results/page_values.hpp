// Values as typed, read for an axis: "60 m3/h" is the number 60 in m3/h.
#pragma once

#include <optional>
#include <string>
#include <vector>

namespace leat {

struct TypedNumbers {
  std::vector<double> values;  // one a text
  std::string unit;            // shared by all, as typed; "" for bare numbers
};

// Nothing unless each text begins with a number and all go on with the same unit.
std::optional<TypedNumbers> typed_numbers(const std::vector<std::string>& texts);

// Positive, spanning more than a factor 20, and in steps of roughly one factor: worth a logarithmic axis.
bool roughly_geometric(std::vector<double> values);

}  // namespace leat
