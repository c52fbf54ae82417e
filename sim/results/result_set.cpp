#include "sim/results/result_set.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <map>
#include <set>
#include <string_view>

#include "models/core/check.hpp"

namespace leat {
namespace {

bool letter_or_digit(char c) {
  return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9');
}

// Letters, digits and underscore, a letter first: valid in netCDF, CF and as an attribute in Python.
bool plain_name(std::string_view name) {
  if (name.empty() || !letter_or_digit(name[0]) || (name[0] >= '0' && name[0] <= '9')) return false;
  return std::all_of(name.begin(), name.end(), [](char c) { return letter_or_digit(c) || c == '_'; });
}

// A blank-separated list of such words is what CF wants in flag_meanings.
bool flag_word(std::string_view word) {
  return !word.empty() && std::all_of(word.begin(), word.end(), [](char c) {
    return letter_or_digit(c) || std::string_view("_-.+@").find(c) != std::string_view::npos;
  });
}

// xarray takes a number with such a unit for a span of time and changes its type; the short forms h, s, d are safe.
bool taken_for_time_span(std::string_view units) {
  constexpr std::array<std::string_view, 7> words = {"days",         "hours",        "minutes",    "seconds",
                                                     "milliseconds", "microseconds", "nanoseconds"};
  return std::find(words.begin(), words.end(), units) != words.end() || units.find(" since ") != std::string_view::npos;
}

class ResultSetCheck {
 public:
  explicit ResultSetCheck(const ResultSet& results) : results_(results) {}

  void run() {
    attributes();
    for (const Axis& axis : results_.axes) one_axis(axis);
    for (const Variable& variable : results_.variables) one_variable(variable);
    for (const Flags& flags : results_.flags) one_flags(flags);
    for (const TextTable& text : results_.texts) {
      take_name(text.name);
      over_axes(text.name, text.axis.empty() ? std::vector<std::string>{} : std::vector{text.axis}, text.values.size());
    }
  }

 private:
  static void expect(bool condition, const std::string& item, const std::string& fault) {
    check(condition, "result '" + item + "': " + fault);
  }

  void attributes() const {
    std::set<std::string> seen = {"Conventions"};  // the writer's own
    for (const auto& [name, text] : results_.attributes) {
      expect(plain_name(name), name, "an attribute's name needs letters, digits and underscore, a letter first");
      expect(seen.insert(name).second, name, "the attribute stands twice");
    }
  }

  void take_name(const std::string& name) {
    expect(plain_name(name), name, "a name needs letters, digits and underscore, a letter first");
    expect(names_.insert(name).second, name, "the name is used twice");
  }

  static void check_units(const std::string& item, const std::string& units) {
    expect(!units.empty(), item, "no units; '1' if dimensionless");
    expect(!taken_for_time_span(units), item, "units '" + units + "' would be read as a date or span; write 'h', 's'");
  }

  void one_axis(const Axis& axis) {
    take_name(axis.name);
    expect(axis.labels.empty() || axis.values.empty(), axis.name, "has both labels and values");
    if (!axis.labelled()) check_units(axis.name, axis.units);
    expect(std::set<std::string>(axis.labels.begin(), axis.labels.end()).size() == axis.labels.size(), axis.name,
           "a label stands twice");
    expect(std::all_of(axis.values.begin(), axis.values.end(), [](double value) { return std::isfinite(value); }),
           axis.name, "a coordinate is not finite");
    sizes_[axis.name] = axis.size();
  }

  void over_axes(const std::string& item, const std::vector<std::string>& axes, std::size_t count) const {
    expect(axes.size() <= 8, item, "has more than 8 axes");
    expect(std::set<std::string>(axes.begin(), axes.end()).size() == axes.size(), item, "has one axis twice");
    std::size_t needed = 1;
    for (const std::string& axis : axes) {
      const auto size = sizes_.find(axis);
      expect(size != sizes_.end(), item, "has an axis '" + axis + "' that the set lacks");
      needed *= size->second;
    }
    expect(count == needed, item, std::to_string(count) + " values, its axes need " + std::to_string(needed));
  }

  void one_variable(const Variable& variable) {
    take_name(variable.name);
    check_units(variable.name, variable.units);
    over_axes(variable.name, variable.axes, variable.values.size());
  }

  void one_flags(const Flags& flags) {
    take_name(flags.name);
    over_axes(flags.name, flags.axes, flags.values.size());
    const std::size_t count = flags.meanings.size();
    expect(count >= 1 && count <= 127, flags.name, "needs 1 to 127 meanings");
    expect(std::all_of(flags.meanings.begin(), flags.meanings.end(), flag_word), flags.name,
           "a meaning is not one word of letters, digits and _ - . + @");
    expect(std::all_of(flags.values.begin(), flags.values.end(),
                       [&](signed char value) { return value >= 0 && static_cast<std::size_t>(value) < count; }),
           flags.name, "a value has no meaning");
  }

  const ResultSet& results_;
  std::set<std::string> names_;
  std::map<std::string, std::size_t> sizes_;
};

}  // namespace

void check_result_set(const ResultSet& results) { ResultSetCheck(results).run(); }

}  // namespace leat
