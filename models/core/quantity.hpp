// Quantity: a number with its unit as typed, and the way to SI.
//   units:   built in code (quantity.cpp holds the table); kg m s mol K A and what follows from them
//   prefix:  n u m c d h k M G, before most symbols
//   refuses: words that mean two things (ton, gal, oz, C, F, ...), with a hint what to write instead
//   threads: the unit parser is not safe for two threads; one lock guards it here. Parse and convert on one thread, while the
//            input is loaded; a calculation holds SI numbers and never calls in here.
#pragma once

#include <optional>
#include <string>
#include <string_view>

namespace leat {

struct Quantity {
  double number = 0;  // value in `unit` [unit]
  std::string unit;   // as typed; empty: a bare number
};

struct QuantityReading {
  bool ok = false;
  Quantity quantity;
  std::string fault;  // why it was refused, a sentence part that follows the value: "'010' has a leading zero"
};

// A whole text as a finite number in the one form accepted: an optional minus, digits without a leading zero, a point,
// an exponent. No plus in front, no hexadecimal, no nan or inf, nothing behind.
std::optional<double> parse_number(std::string_view text);

// "4 mol/L", "25 degC", "8 %", "-20 kJ/mol". A bare number is ok and has unit ""; whether that is allowed is the caller's rule.
// A unit nobody knows is refused here, with a hint where one is at hand.
QuantityReading parse_quantity(std::string_view text);

bool known_unit(std::string_view unit);

// Why a unit is not known, "" if it is: "'ton' could be ...; write t ..." or "'xyz' is not a unit known here".
std::string unit_fault(std::string_view unit);

// Both units known and of one dimension. "" counts as no unit and is convertible to nothing; "1" is the unit of a plain ratio.
bool convertible(std::string_view unit, std::string_view to);

// The value in unit `to` [to]. Throws std::invalid_argument when not convertible or when the result is not finite.
double convert(const Quantity& quantity, std::string_view to);

// The same for a difference of temperatures [to]: degC counts as K. Other units convert as above.
double convert_difference(const Quantity& quantity, std::string_view to);

// What is asked for where `to` is declared: "is not a time; write for example 6 h". With unit "" (a bare number):
// "has no unit; a time is needed, write for example 6 h".
std::string unit_hint(std::string_view unit, std::string_view to);

}  // namespace leat
