#include "sim/results/page_values.hpp"

#include <algorithm>
#include <charconv>
#include <cmath>

namespace leat {
namespace {

bool read_number(const std::string& text, double& value, std::string& unit) {
  std::size_t first = text.find_first_not_of(" +");
  if (first == std::string::npos) return false;
  const auto read = std::from_chars(text.data() + first, text.data() + text.size(), value);
  if (read.ec != std::errc() || !std::isfinite(value)) return false;
  unit = text.substr(static_cast<std::size_t>(read.ptr - text.data()));
  unit.erase(0, unit.find_first_not_of(' '));
  unit.erase(unit.find_last_not_of(' ') + 1);
  return true;
}

}  // namespace

std::optional<TypedNumbers> typed_numbers(const std::vector<std::string>& texts) {
  TypedNumbers numbers;
  for (const std::string& text : texts) {
    double value = 0;
    std::string unit;
    if (!read_number(text, value, unit) || (!numbers.values.empty() && unit != numbers.unit)) return std::nullopt;
    numbers.unit = unit;
    numbers.values.push_back(value);
  }
  if (numbers.values.empty()) return std::nullopt;
  return numbers;
}

bool roughly_geometric(std::vector<double> values) {
  constexpr double least_span = 20, most_uneven = 3;
  std::sort(values.begin(), values.end());
  values.erase(std::unique(values.begin(), values.end()), values.end());
  if (values.empty() || !(values.front() > 0) || !(values.back() > least_span * values.front())) return false;
  double shortest = INFINITY, longest = 0;
  for (std::size_t k = 1; k < values.size(); ++k) {
    const double step = std::log(values[k] / values[k - 1]);
    shortest = std::min(shortest, step);
    longest = std::max(longest, step);
  }
  return longest <= most_uneven * shortest;
}

}  // namespace leat
