// stepped_input: the input that a ladder steps, as numbers in one unit for the file.
//   quantities of one kind:        in the unit of the first series
//   series of different kinds:     numbers as typed, unit "1"; leat_stepped_units says `mixed`
//   values that are no quantities: their position from 1, unit "1"
#pragma once

#include <string>

#include "sim/study/study_spec.hpp"

namespace leat {

class SteppedInput {
 public:
  explicit SteppedInput(const LadderSpec& ladder);

  double number(const VariedInput& input, std::size_t value) const;
  std::string as_typed() const;  // unit as typed; "1" for bare numbers and words, "mixed"
  std::string udunits() const;   // what the stock unit library reads alike; "1" where that is not sure
  std::string meaning() const;
  bool logarithmic() const { return logarithmic_; }

 private:
  enum class Kind { quantities, mixed, words };
  Kind kind_ = Kind::quantities;
  std::string unit_;
  bool logarithmic_ = true;
};

}  // namespace leat
