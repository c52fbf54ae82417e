#pragma once
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "models/chemistry/probe.hpp"

namespace leat {

// Contract of a dissolution law: the speed g of the liquor clock of a lot. A lot of first-order kernel loses g f
// [mol/s] of its retained amount f [mol].
class RateLaw {
 public:
  virtual ~RateLaw() = default;
  virtual std::string_view name() const = 0;
  // What speed() wants to know of the cell, in this order; fixed for the life of the law.
  virtual std::span<const Probe> probes() const = 0;
  // Speed g >= 0 [1/s] at the probes' values, temperature [K]; d g / d probe goes to `slopes`.
  virtual double speed(std::span<const double> values, double temperature, std::span<double> slopes) const = 0;
};

}  // namespace leat
