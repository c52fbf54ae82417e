// TypedReader: what a YAML node means as a number, a quantity, a word. Every mistake becomes a fault at its place and the
// answer is empty; the caller goes on reading, so that one pass lists all faults.
#pragma once

#include <limits>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "models/core/diagnostics.hpp"
#include "sim/input/yaml_document.hpp"

namespace leat {

class TypedReader {
 public:
  static constexpr double lowest = -std::numeric_limits<double>::infinity();
  static constexpr double highest = std::numeric_limits<double>::infinity();

  explicit TypedReader(Diagnostics& diagnostics) : diagnostics_(diagnostics) {}

  // A number with a unit, in si_unit [si_unit]; limits in si_unit, both allowed values. A bare number is a fault unless
  // si_unit is "1" (a ratio: "0.08" and "8 %" are both read).
  std::optional<double> quantity(const YamlNode& node, std::string_view si_unit, double min = lowest, double max = highest);

  // A difference of temperatures or any other quantity; degC counts as K [si_unit].
  std::optional<double> difference(const YamlNode& node, std::string_view si_unit, double min = lowest, double max = highest);

  std::optional<double> number(const YamlNode& node, double min = lowest, double max = highest);  // without unit [1]
  std::optional<long> whole_number(const YamlNode& node, long min = std::numeric_limits<long>::min(),
                                   long max = std::numeric_limits<long>::max());
  std::optional<std::string> text(const YamlNode& node);                                          // not empty
  std::optional<std::string> choice(const YamlNode& node, std::span<const std::string> allowed);  // one of the words
  std::optional<bool> yes_no(const YamlNode& node);                                               // true or false only
  std::vector<std::string> text_list(const YamlNode& node);  // a single scalar counts as a list of one

  bool is_map(const YamlNode& node);   // a fault if it is something else
  bool is_list(const YamlNode& node);  // a fault if it is something else

  // A fault for each key that is not allowed, with the nearest allowed one and the whole list.
  void only_keys(const YamlNode& map, std::span<const std::string> allowed);

  // The value under a key; a fault at the map and null when it is missing.
  const YamlNode* required(const YamlNode& map, std::string_view key);

  Diagnostics& diagnostics() { return diagnostics_; }

 private:
  std::optional<double> read_quantity(const YamlNode& node, std::string_view si_unit, double min, double max, bool difference);
  bool plain_scalar(const YamlNode& node, std::string_view expected);

  Diagnostics& diagnostics_;
};

}  // namespace leat
