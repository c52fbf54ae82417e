#include "sim/results/stepped_input.hpp"

#include <algorithm>
#include <set>

#include "models/core/quantity.hpp"

namespace leat {
namespace {

// Symbols that mean the same here and in the stock unit library. Not among them: a (an are there), kt (a knot), cal, M, P, Nm3.
bool reads_alike(const std::string& unit) {
  static const std::set<std::string> symbols = {"s",   "min", "h",   "d",    "m",    "cm",   "mm", "um",   "km",  "L",   "mL", "g",  "mg", "ug", "kg", "t", "mol", "mmol",
                                                "umol", "kmol", "K",  "degC", "Pa",   "kPa",  "MPa", "bar", "J",   "kJ",  "MJ", "W",  "kW", "V",  "mV", "A", "N",   "%"};
  std::string symbol;
  for (const char c : unit + " ") {
    const bool letter = (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || c == '%';
    if (letter) {
      symbol += c;
      continue;
    }
    if (!symbol.empty() && !symbols.count(symbol)) return false;
    if (static_cast<unsigned char>(c) >= 0x80) return false;
    symbol.clear();
  }
  return true;
}

}  // namespace

SteppedInput::SteppedInput(const LadderSpec& ladder) : unit_(ladder.series.front().vary.unit) {
  for (const LadderSeries& one : ladder.series) {
    logarithmic_ = logarithmic_ && one.vary.logarithmic;
    if (one.vary.numbers.empty()) kind_ = Kind::words;
  }
  for (const LadderSeries& one : ladder.series)
    if (kind_ == Kind::quantities && one.vary.unit != unit_ && !convertible(one.vary.unit, unit_)) kind_ = Kind::mixed;
}

double SteppedInput::number(const VariedInput& input, std::size_t value) const {
  if (kind_ == Kind::words) return static_cast<double>(value + 1);
  const double number = input.numbers.at(value);
  return kind_ == Kind::mixed || input.unit == unit_ ? number : convert({number, input.unit}, unit_);
}

std::string SteppedInput::as_typed() const { return kind_ == Kind::mixed ? "mixed" : kind_ == Kind::words || unit_.empty() ? "1" : unit_; }

std::string SteppedInput::udunits() const { return kind_ == Kind::quantities && !unit_.empty() && reads_alike(unit_) ? unit_ : "1"; }

std::string SteppedInput::meaning() const {
  if (kind_ == Kind::words) return "position of the stepped value in its series, from 1";
  if (kind_ == Kind::mixed) return "stepped value, number as typed; its unit stands in value_as_typed";
  return udunits() == "1" && !unit_.empty() ? "stepped value [" + unit_ + "]" : "stepped value";
}

}  // namespace leat
