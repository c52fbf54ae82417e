#include "models/core/quantity.hpp"

#include <udunits2.h>

#include <algorithm>
#include <charconv>
#include <cmath>
#include <map>
#include <memory>
#include <mutex>
#include <stdexcept>
#include <utility>
#include <vector>

#include "models/core/check.hpp"
#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"
#include "models/core/unit_table.hpp"

namespace leat {
namespace {

constexpr std::size_t longest_unit = 60;  // [byte]

// A typed text in a message: in quotes, on one line, not too long.
std::string quote(std::string_view text) {
  std::size_t length = std::min(text.size(), longest_unit);
  while (length < text.size() && (static_cast<unsigned char>(text[length]) & 0xC0) == 0x80) --length;  // not inside a character
  std::string result(text.substr(0, length));
  std::replace(result.begin(), result.end(), '\n', ' ');
  return "'" + result + (length < text.size() ? "...'" : "'");
}

std::string_view trim(std::string_view text) {
  const auto is_blank = [](char c) { return c == ' ' || c == '\t'; };
  while (!text.empty() && is_blank(text.front())) text.remove_prefix(1);
  while (!text.empty() && is_blank(text.back())) text.remove_suffix(1);
  return text;
}

bool is_digit(char c) { return c >= '0' && c <= '9'; }
bool is_letter(char c) { return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || c == '%'; }

// The signs people paste (micro, degree, raised digits, middle dot) in plain letters.
std::string plain_letters(std::string_view text) {
  static constexpr std::pair<std::string_view, std::string_view> rows[] = {
      {"\u00b5", "u"}, {"\u03bc", "u"}, {"\u00b0C", "degC"}, {"\u00b2", "2"}, {"\u00b3", "3"}, {"\u00b9", "1"},
      {"\u207b", "-"}, {"\u00b7", "."}, {"\u22c5", "."}};
  std::string result;
  while (!text.empty()) {
    const auto row = std::find_if(std::begin(rows), std::end(rows), [&](const auto& r) { return text.starts_with(r.first); });
    if (row == std::end(rows)) {
      result += text.front();
      text.remove_prefix(1);
    } else {
      result += row->second;
      text.remove_prefix(row->first.size());
    }
  }
  return result;
}

struct FreeUnit {
  void operator()(ut_unit* unit) const { ut_free(unit); }
};
using UnitPointer = std::unique_ptr<ut_unit, FreeUnit>;

// The unit system and the units read so far. The unit parser tells faults by a null pointer; its status word is not used,
// because it stays at success for several of them.
class UnitSystem {
 public:
  UnitSystem() {
    ut_set_error_message_handler(ut_ignore);
    system_.reset(ut_new_system());
    check(system_ != nullptr, "no unit system");
    for (const char* base : {"kg", "m", "s", "mol", "K", "A"}) name(base, UnitPointer(ut_new_base_unit(system_.get())));
    for (const UnitRow& row : unit_rows) {
      const UnitPointer base(ut_parse(system_.get(), row.base, UT_ASCII));
      check(base != nullptr, row.base);
      const std::string symbol = row.symbol;
      if (!is_known_symbol(symbol)) name(symbol, UnitPointer(ut_scale(row.factor, base.get())));
      for (const char* prefix = row.prefixes; *prefix != '\0'; ++prefix) {
        name(*prefix + symbol, UnitPointer(ut_scale(prefix_factor(*prefix) * row.factor, base.get())));
      }
    }
    const UnitPointer kelvin(ut_parse(system_.get(), "K", UT_ASCII));
    name("degC", UnitPointer(ut_offset(kelvin.get(), zero_celsius)));
  }

  bool is_known_symbol(std::string_view symbol) const { return std::find(symbols_.begin(), symbols_.end(), symbol) != symbols_.end(); }

  // The unit, or null; then `fault` says why.
  const ut_unit* find(std::string_view text, std::string& fault) {
    const std::string key(trim(text));
    const auto known = cache_.find(key);
    if (known != cache_.end()) return known->second.get();
    const std::string spelt = spelling(key, fault);
    if (spelt.empty()) return nullptr;
    UnitPointer unit(ut_parse(system_.get(), spelt.c_str(), UT_ASCII));
    if (unit == nullptr) {
      fault = quote(key) + " is not a unit";
      return nullptr;
    }
    return cache_.emplace(key, std::move(unit)).first->second.get();
  }

 private:
  struct FreeSystem {
    void operator()(ut_system* system) const { ut_free_system(system); }
  };

  void name(const std::string& symbol, const UnitPointer& unit) {
    check(unit != nullptr && ut_map_symbol_to_unit(symbol.c_str(), UT_ASCII, unit.get()) == UT_SUCCESS, symbol);
    symbols_.push_back(symbol);
  }

  std::string spelling(const std::string& text, std::string& fault) const;
  bool read_symbol(const std::string& s, std::size_t& i, std::string& result, std::string& fault) const;
  std::string symbol_fault(std::string_view symbol) const;

  std::unique_ptr<ut_system, FreeSystem> system_;
  std::vector<std::string> symbols_;
  std::map<std::string, UnitPointer, std::less<>> cache_;  // after system_: freed before it
};

std::string UnitSystem::symbol_fault(std::string_view symbol) const {
  for (const auto& [word, hint] : hint_rows) {
    if (word == symbol) return quote(symbol) + " " + std::string(hint);
  }
  std::vector<std::string> shown;
  for (const std::string& known : symbols_) {
    if (known != normal_cubic_metre) shown.push_back(known);
  }
  const bool long_enough = symbol.size() > 2;  // two letters are near to nearly every unit
  return quote(symbol) + " is not a unit known here" + (long_enough ? did_you_mean(symbol, shown) : "");
}

// Reads the symbol at s[i] with its exponent, appends it as the unit parser is to read it, and moves i behind it.
// False with a fault when the symbol is not known.
bool UnitSystem::read_symbol(const std::string& s, std::size_t& i, std::string& result, std::string& fault) const {
  std::size_t end = i;
  while (end < s.size() && is_letter(s[end])) ++end;
  std::string symbol = s.substr(i, end - i);
  if (symbol == "Nm" && end < s.size() && s[end] == '3') {
    symbol = normal_cubic_metre;
    ++end;
  } else if (symbol == normal_cubic_metre || !is_known_symbol(symbol)) {
    fault = symbol_fault(symbol);
    return false;
  }
  if (symbol == "degC" && s != "degC") {
    fault = quote(s) + " puts degC into a product; write K";
    return false;
  }
  result += symbol;
  std::size_t digit = end;
  if (digit < s.size() && s[digit] == '^') ++digit;
  const bool minus = digit < s.size() && s[digit] == '-';
  if (minus) ++digit;
  if (digit < s.size() && s[digit] >= '1' && s[digit] <= '9') {
    result += std::string(minus ? "^-" : "^") + s[digit];
    end = digit + 1;
  }
  i = end;
  return true;
}

// Reads a unit by our own narrow grammar and returns it as the unit parser is to read it, or "" with a fault. Allowed: known
// symbols, a whole exponent right behind (m3, m-3, m^3), one of blank . * / between, brackets, '1/' in front.
// The unit parser alone would also take shifts of origin, numbers, words such as "per", and a bracket left open.
std::string UnitSystem::spelling(const std::string& text, std::string& fault) const {
  const auto refuse = [&](const std::string& why) {
    fault = quote(text) + " " + why;
    return std::string();
  };
  if (text.empty()) return refuse("is no unit");
  if (text == "1") return "1";
  if (text.size() > longest_unit) return refuse("is too long for a unit");
  const std::string s = plain_letters(text);
  const bool reciprocal = s.starts_with("1/");
  std::string result = reciprocal ? "1" : "";
  std::vector<bool> divided = {false};  // per open bracket: a '/' came before
  bool expect_symbol = !reciprocal;
  for (std::size_t i = reciprocal ? 1 : 0; i < s.size();) {
    const char c = s[i];
    const char next = i + 1 < s.size() ? s[i + 1] : ' ';
    if (c == ' ' && (expect_symbol || std::string_view(" /*.)").find(next) != std::string_view::npos)) {
      ++i;  // a blank that joins nothing
    } else if (expect_symbol && c == '(') {
      divided.push_back(false);
      result += s[i++];
    } else if (expect_symbol && is_letter(c)) {
      if (!read_symbol(s, i, result, fault)) return "";
      expect_symbol = false;
    } else if (!expect_symbol && c == ')' && divided.size() > 1) {
      divided.pop_back();
      result += s[i++];
    } else if (!expect_symbol && (c == '/' || c == '.' || c == '*' || c == ' ')) {
      if (c != '/' && divided.back()) return refuse("can be read in two ways; write each divisor with its own '/', as in J/mol/K");
      if (c == '/') divided.back() = true;
      result += c == '/' ? '/' : '.';
      expect_symbol = true;
      ++i;
    } else {
      return refuse(is_digit(c) ? "has a number where a unit is expected" : "is not a unit");
    }
  }
  if (expect_symbol) return refuse("ends where a unit is expected");
  if (divided.size() > 1) return refuse("has a bracket that is not closed");
  return result;
}

std::mutex unit_lock;  // the unit parser ends the process when two threads are in it

UnitSystem& unit_system() {
  static UnitSystem system;
  return system;
}

// Both of one dimension. The unit parser also calls a unit and its reciprocal convertible (s and 1/s): not so here.
bool same_dimension(const ut_unit* a, const ut_unit* b) {
  const UnitPointer ratio(ut_divide(a, b));
  return ratio != nullptr && ut_is_dimensionless(ratio.get()) != 0;
}

double convert_number(double number, std::string_view unit, std::string_view to) {
  const std::lock_guard lock(unit_lock);
  std::string fault;
  const ut_unit* from_unit = unit_system().find(unit, fault);
  const ut_unit* to_unit = from_unit == nullptr ? nullptr : unit_system().find(to, fault);
  if (to_unit == nullptr) throw std::invalid_argument(fault);
  const std::unique_ptr<cv_converter, void (*)(cv_converter*)> converter(
      same_dimension(from_unit, to_unit) ? ut_get_converter(const_cast<ut_unit*>(from_unit), const_cast<ut_unit*>(to_unit)) : nullptr, cv_free);
  if (converter == nullptr) throw std::invalid_argument(quote(unit) + " cannot be converted to " + quote(to));
  const double result = cv_convert_double(converter.get(), number);
  if (!std::isfinite(result)) throw std::invalid_argument("the value in " + quote(to) + " is not a finite number");
  return result;
}

// Length of the number at the start of a text, 0 if there is none in the accepted form [byte].
std::size_t number_length(std::string_view text) {
  const auto digits = [&](std::size_t at) {
    while (at < text.size() && is_digit(text[at])) ++at;
    return at;
  };
  const std::size_t first = text.starts_with('-') ? 1 : 0;
  std::size_t end = digits(first);
  if (end == first || (text[first] == '0' && end - first > 1)) return 0;
  if (end < text.size() && text[end] == '.') {
    const std::size_t after = digits(end + 1);
    if (after == end + 1) return 0;
    end = after;
  }
  if (end < text.size() && (text[end] == 'e' || text[end] == 'E')) {
    std::size_t sign = end + 1;
    if (sign < text.size() && (text[sign] == '-' || text[sign] == '+')) ++sign;
    if (digits(sign) > sign) end = digits(sign);
  }
  return end;
}

// Why a text has no number in front.
std::string number_fault(std::string_view text) {
  const std::size_t first = text.starts_with('-') || text.starts_with('+') ? 1 : 0;
  const std::string_view body = text.substr(first);
  if (text.empty()) return "is empty where a number is expected";
  if (text.front() == '+') return quote(text) + " starts with a plus; leave it out";
  if (body.size() > 1 && body[0] == '.' && is_digit(body[1])) return quote(text) + " has no digit before the point";
  if (body.size() > 1 && body[0] == '0' && is_digit(body[1])) return quote(text) + " has a leading zero; leave it out";
  if (!body.empty() && is_digit(body[0])) return quote(text) + " has no digit behind the point";
  return quote(text) + " does not start with a number";
}

}  // namespace

std::optional<double> parse_number(std::string_view text) {
  if (text.empty() || number_length(text) != text.size()) return std::nullopt;
  double value = 0;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (error != std::errc() || end != text.data() + text.size() || !std::isfinite(value)) return std::nullopt;
  return value;
}

QuantityReading parse_quantity(std::string_view raw) {
  const std::string_view text = trim(raw);
  const auto refuse = [](std::string fault) { return QuantityReading{false, {}, std::move(fault)}; };
  const std::size_t length = number_length(text);
  if (length == 0) return refuse(number_fault(text));
  const std::optional<double> number = parse_number(text.substr(0, length));
  if (!number) return refuse(quote(text) + " is too large or too small for a number");
  const std::string unit(trim(text.substr(length)));
  if (unit.empty()) return {true, {*number, ""}, ""};
  if (unit[0] == ',') return refuse(quote(text) + " has a comma; the decimal sign is a point");
  if (text[length - 1] == '0' && length == 1 && (unit[0] == 'x' || unit[0] == 'X')) return refuse(quote(text) + " is not a decimal number");
  if (is_digit(unit[0]) && !unit.starts_with("1/")) return refuse(quote(text) + " has a second number; a number is written without blanks");
  std::string fault = unit_fault(unit);
  if (!fault.empty()) return refuse(std::move(fault));
  return {true, {*number, unit}, ""};
}

bool known_unit(std::string_view unit) { return unit_fault(unit).empty(); }

std::string unit_fault(std::string_view unit) {
  const std::lock_guard lock(unit_lock);
  std::string fault;
  return unit_system().find(unit, fault) == nullptr ? fault : "";
}

bool convertible(std::string_view unit, std::string_view to) {
  const std::lock_guard lock(unit_lock);
  std::string fault;
  const ut_unit* from_unit = unit_system().find(unit, fault);
  const ut_unit* to_unit = unit_system().find(to, fault);
  return from_unit != nullptr && to_unit != nullptr && same_dimension(from_unit, to_unit);
}

double convert(const Quantity& quantity, std::string_view to) { return convert_number(quantity.number, quantity.unit, to); }

double convert_difference(const Quantity& quantity, std::string_view to) {
  const auto step = [](std::string_view unit) { return plain_letters(trim(unit)) == "degC" ? std::string("K") : std::string(unit); };
  return convert_number(quantity.number, step(quantity.unit), step(to));
}

std::string unit_hint(std::string_view unit, std::string_view to) {
  for (const DimensionRow& row : dimension_rows) {
    if (!convertible(row.unit, to)) continue;
    const std::string example = std::string("write for example ") + row.example;
    if (trim(unit).empty()) return std::string("has no unit; ") + row.name + " is needed, " + example;
    return std::string("is not ") + row.name + "; " + example;
  }
  if (trim(unit).empty()) return "has no unit; one that converts to " + std::string(to) + " is needed";
  return "cannot be converted to " + std::string(to);
}

}  // namespace leat
