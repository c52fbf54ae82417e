#include "sim/input/typed_reader.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <charconv>
#include <cmath>
#include <stdexcept>

#include "models/core/check.hpp"
#include "models/core/nearest.hpp"
#include "models/core/quantity.hpp"

namespace leat {
namespace {

std::string_view kind_name(const YamlNode& node) {
  switch (node.kind) {
    case YamlNode::Kind::list: return "a list";
    case YamlNode::Kind::map: return "a map of keys";
    case YamlNode::Kind::scalar: break;
  }
  return "a single value";
}

// A typed text in a message: at most 60 bytes, on one line.
std::string shown(std::string_view text) {
  constexpr std::size_t longest = 60;  // [byte]
  std::size_t length = std::min(text.size(), longest);
  while (length < text.size() && (static_cast<unsigned char>(text[length]) & 0xC0) == 0x80) --length;  // not inside a character
  std::string result(text.substr(0, length));
  for (char& c : result) {
    if (c == '\n' || c == '\t' || c == '\r') c = ' ';
  }
  return length < text.size() ? result + "..." : result;
}

std::string joined(std::span<const std::string> words) { return fmt::format("{}", fmt::join(words, ", ")); }

// "at least 1 K", "0 to 1"; with a unit behind unless it is a ratio.
std::string range_text(double min, double max, std::string_view unit) {
  const std::string tail = unit.empty() || unit == "1" ? "" : " " + std::string(unit);
  if (std::isinf(min)) return fmt::format("at most {}{}", max, tail);
  if (std::isinf(max)) return fmt::format("at least {}{}", min, tail);
  return fmt::format("{} to {}{}", min, max, tail);
}

}  // namespace

bool TypedReader::plain_scalar(const YamlNode& node, std::string_view expected) {
  if (!node.is_scalar()) {
    diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("{} stands here; {} is needed", kind_name(node), expected));
    return false;
  }
  if (node.quoted) {
    diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("'{}' is a text in quotes; {} is needed, without quotes", shown(node.text), expected));
    return false;
  }
  return true;
}

std::optional<double> TypedReader::read_quantity(const YamlNode& node, std::string_view si_unit, double min, double max, bool difference) {
  check(known_unit(si_unit), "a quantity is declared with an unknown unit");
  const bool ratio = si_unit == "1";
  if (!node.is_scalar()) {
    diagnostics_.fault(Code::wrong_kind, node.place,
                       fmt::format("{} stands here; {} is needed", kind_name(node), ratio ? "a number" : "a number with a unit"));
    return std::nullopt;
  }
  QuantityReading reading = parse_quantity(node.text);
  if (!reading.ok) {
    diagnostics_.fault(Code::bad_quantity, node.place, reading.fault);
    return std::nullopt;
  }
  if (ratio && reading.quantity.unit.empty()) reading.quantity.unit = "1";
  if (!convertible(reading.quantity.unit, si_unit)) {
    diagnostics_.fault(Code::wrong_unit, node.place, shown(node.text) + " " + unit_hint(reading.quantity.unit, si_unit));
    return std::nullopt;
  }
  double value = 0;  // [si_unit]
  try {
    value = difference ? convert_difference(reading.quantity, si_unit) : convert(reading.quantity, si_unit);
  } catch (const std::invalid_argument& error) {
    diagnostics_.fault(Code::bad_quantity, node.place, shown(node.text) + ": " + error.what());
    return std::nullopt;
  }
  // The ends of a range are allowed: a unit's rounding (95 %) must not put them outside.
  if (std::isfinite(min) && std::abs(value - min) <= 1e-12 * std::abs(min)) value = min;
  if (std::isfinite(max) && std::abs(value - max) <= 1e-12 * std::abs(max)) value = max;
  // Written as "not inside" so that nothing but a number inside passes.
  if (!(value >= min && value <= max)) {
    diagnostics_.fault(Code::out_of_range, node.place, fmt::format("{} is out of range; allowed is {}", shown(node.text), range_text(min, max, si_unit)));
    return std::nullopt;
  }
  return value;
}

std::optional<double> TypedReader::quantity(const YamlNode& node, std::string_view si_unit, double min, double max) {
  return read_quantity(node, si_unit, min, max, false);
}

std::optional<double> TypedReader::difference(const YamlNode& node, std::string_view si_unit, double min, double max) {
  return read_quantity(node, si_unit, min, max, true);
}

std::optional<double> TypedReader::number(const YamlNode& node, double min, double max) {
  if (!plain_scalar(node, "a number")) return std::nullopt;
  const std::optional<double> value = parse_number(node.text);
  if (!value) {
    const QuantityReading reading = parse_quantity(node.text);
    diagnostics_.fault(Code::bad_quantity, node.place,
                       reading.ok ? shown(node.text) + " has a unit; a plain number is needed" : reading.fault);
    return std::nullopt;
  }
  if (!(*value >= min && *value <= max)) {
    diagnostics_.fault(Code::out_of_range, node.place, fmt::format("{} is out of range; allowed is {}", shown(node.text), range_text(min, max, "")));
    return std::nullopt;
  }
  return value;
}

std::optional<long> TypedReader::whole_number(const YamlNode& node, long min, long max) {
  if (!plain_scalar(node, "a whole number")) return std::nullopt;
  long value = 0;
  const char* const end = node.text.data() + node.text.size();
  const auto [stop, error] = std::from_chars(node.text.data(), end, value);
  const bool written_so = error == std::errc() && stop == end && fmt::format("{}", value) == node.text;  // no 010, no -0
  if (!written_so) {
    diagnostics_.fault(Code::bad_quantity, node.place, fmt::format("'{}' is not a whole number; write digits only, such as 3", shown(node.text)));
    return std::nullopt;
  }
  if (value < min || value > max) {
    const std::string allowed = min == std::numeric_limits<long>::min()   ? fmt::format("at most {}", max)
                                : max == std::numeric_limits<long>::max() ? fmt::format("at least {}", min)
                                                                          : fmt::format("{} to {}", min, max);
    diagnostics_.fault(Code::out_of_range, node.place, fmt::format("{} is out of range; allowed is {}", value, allowed));
    return std::nullopt;
  }
  return value;
}

std::optional<std::string> TypedReader::text(const YamlNode& node) {
  if (!node.is_scalar()) {
    diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("{} stands here; a text is needed", kind_name(node)));
    return std::nullopt;
  }
  if (node.text.find_first_not_of(" \t\r\n") == std::string::npos) {
    diagnostics_.fault(Code::wrong_kind, node.place, "the text is empty");
    return std::nullopt;
  }
  return node.text;
}

std::optional<std::string> TypedReader::choice(const YamlNode& node, std::span<const std::string> allowed) {
  std::optional<std::string> word = text(node);
  if (!word) return std::nullopt;
  for (const std::string& known : allowed) {
    if (known == *word) return word;
  }
  const std::string near = did_you_mean(*word, allowed);
  diagnostics_.fault(Code::unknown_name, node.place,
                     fmt::format("'{}' is not known here{}{}{}", shown(*word), near, near.empty() ? "; allowed: " : " Allowed: ", joined(allowed)));
  return std::nullopt;
}

std::optional<bool> TypedReader::yes_no(const YamlNode& node) {
  if (!plain_scalar(node, "true or false")) return std::nullopt;
  if (node.text == "true") return true;
  if (node.text == "false") return false;
  diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("'{}' is neither true nor false; write one of the two", shown(node.text)));
  return std::nullopt;
}

std::vector<std::string> TypedReader::text_list(const YamlNode& node) {
  std::vector<std::string> result;
  const auto take = [&](const YamlNode& item) {
    if (std::optional<std::string> word = text(item)) result.push_back(std::move(*word));
  };
  if (node.is_list()) {
    for (const YamlNode& item : node.items) take(item);
  } else if (node.is_scalar()) {
    take(node);
  } else {
    diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("{} stands here; a list of texts is needed", kind_name(node)));
  }
  return result;
}

bool TypedReader::is_map(const YamlNode& node) {
  if (node.is_map()) return true;
  const std::string what = node.is_scalar() ? fmt::format("'{}'", shown(node.text)) : std::string(kind_name(node));
  diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("{} stands here; a map of 'key: value' is needed", what));
  return false;
}

bool TypedReader::is_list(const YamlNode& node) {
  if (node.is_list()) return true;
  const std::string what = node.is_scalar() ? fmt::format("'{}'", shown(node.text)) : std::string(kind_name(node));
  diagnostics_.fault(Code::wrong_kind, node.place, fmt::format("{} stands here; a list is needed, such as [a, b]", what));
  return false;
}

void TypedReader::only_keys(const YamlNode& map, std::span<const std::string> allowed) {
  for (const YamlNode::Entry& entry : map.entries) {
    bool known = false;
    for (const std::string& key : allowed) known = known || key == entry.key;
    if (known) continue;
    const std::string near = did_you_mean(entry.key, allowed);
    diagnostics_.fault(Code::unknown_key, entry.key_place,
                       fmt::format("'{}' is not a key here{}{}{}", shown(entry.key), near, near.empty() ? "; allowed: " : " Allowed: ", joined(allowed)));
  }
}

const YamlNode* TypedReader::required(const YamlNode& map, std::string_view key) {
  const YamlNode* value = map.find(key);
  if (value == nullptr) {
    Place place = map.place;
    place.key += (place.key.empty() ? "" : ".") + std::string(key);
    diagnostics_.fault(Code::missing_key, std::move(place), fmt::format("'{}' is needed here and missing", key));
  }
  return value;
}

}  // namespace leat
