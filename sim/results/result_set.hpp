// ResultSet: what a results file holds, as plain data: named axes, numbers over them, flags, texts and attributes.
// The rooms below fill it, the results door writes and reads it. Units here are those of the file (UDUNITS text),
// and every name is the word seen in the file, in a table and in a plot.
#pragma once

#include <cstddef>
#include <string>
#include <utility>
#include <vector>

namespace leat {

// A dimension with its coordinate: labels (species, streams ...) or numbers (time), never both.
// Without entries it is an axis of numbers if it has a unit, else one of labels.
struct Axis {
  std::string name;
  std::string long_name;
  std::string units;                // of the numbers; may stay empty for labels
  std::vector<std::string> labels;  // UTF-8, each once
  std::vector<double> values;       // finite
  bool unlimited = false;           // grows row by row in the file: time

  bool labelled() const { return !labels.empty() || (values.empty() && units.empty()); }
  std::size_t size() const { return labelled() ? labels.size() : values.size(); }
};

// Numbers over zero or more axes, the last axis running fastest; NaN marks a missing value.
struct Variable {
  std::string name;
  std::string long_name;
  std::string units;  // "1" when dimensionless
  std::vector<std::string> axes;
  std::vector<double> values;
};

// A state out of a short list: each value counts into meanings, from 0.
struct Flags {
  std::string name;
  std::string long_name;
  std::vector<std::string> axes;
  std::vector<signed char> values;
  std::vector<std::string> meanings;  // one word each, such as not_converged
};

// One text for each entry of an axis; with an empty axis name, a single text (the input file, for example).
struct TextTable {
  std::string name;
  std::string long_name;
  std::string axis;
  std::vector<std::string> values;
};

struct ResultSet {
  std::vector<std::pair<std::string, std::string>> attributes;  // of the whole file: name, text
  std::vector<Axis> axes;
  std::vector<Variable> variables;
  std::vector<Flags> flags;
  std::vector<TextTable> texts;
};

// Throws std::logic_error, naming the item, when sizes, names, units or flags could not be written in a form that
// every reader opens. Only a programmer's fault can cause that.
void check_result_set(const ResultSet& results);

}  // namespace leat
