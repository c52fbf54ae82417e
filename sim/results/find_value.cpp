#include <fmt/format.h>
#include <fmt/ranges.h>

#include <algorithm>
#include <cmath>
#include <stdexcept>

#include "models/core/nearest.hpp"
#include "models/core/quantity.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

constexpr std::size_t most_named = 12;  // words listed in a fault
constexpr double time_rounding = 1e-6;  // relative: how near a stored time must be

std::string listed(const std::vector<std::string>& words) {
  const std::size_t shown = std::min(words.size(), most_named);
  const std::string text = fmt::format("{}", fmt::join(words.begin(), words.begin() + static_cast<std::ptrdiff_t>(shown), ", "));
  return shown < words.size() ? fmt::format("{} and {} more", text, words.size() - shown) : text;
}

// The axis along which a file has moments: the one that takes no label.
bool is_moment(const std::string& axis) { return axis == "time" || axis == "step" || axis == "rung"; }

std::string label_of(const Axis& axis, std::size_t k) { return axis.labelled() ? axis.labels[k] : fmt::format("{}", axis.values[k]); }

std::vector<std::string> labels_of(const Axis& axis) {
  std::vector<std::string> labels;
  for (std::size_t k = 0; k < axis.size(); ++k) labels.push_back(label_of(axis, k));
  return labels;
}

// One label on each axis, joined by points, the longest that fits first.
class LabelReader {
 public:
  explicit LabelReader(std::vector<const Axis*> axes) : axes_(std::move(axes)) {}

  // The places on the axes, or nothing and why.
  std::optional<std::vector<std::size_t>> read(std::string_view rest) {
    std::vector<std::size_t> places;
    if (go(rest, places)) return places;
    return std::nullopt;
  }
  const std::string& fault() const { return fault_; }

 private:
  bool go(std::string_view rest, std::vector<std::size_t>& places) {
    if (places.size() == axes_.size()) {
      if (!rest.empty()) note(places.size(), fmt::format("'{}' is left over behind its labels", rest));
      return rest.empty();
    }
    const Axis& axis = *axes_[places.size()];
    if (rest.empty()) {
      note(places.size(), fmt::format("a label of the axis {} is missing; it has: {}", axis.name, listed(labels_of(axis))));
      return false;
    }
    std::vector<std::pair<std::size_t, std::size_t>> fits;  // length, place
    for (std::size_t k = 0; k < axis.size(); ++k) {
      const std::string label = label_of(axis, k);
      const bool ends = rest.size() == label.size() || (rest.size() > label.size() + 1 && rest[label.size()] == '.');
      if (!label.empty() && rest.starts_with(label) && ends) fits.emplace_back(label.size(), k);
    }
    std::sort(fits.rbegin(), fits.rend());
    for (const auto& [length, k] : fits) {
      places.push_back(k);
      if (go(rest.substr(std::min(length + 1, rest.size())), places)) return true;
      places.pop_back();
    }
    if (fits.empty()) note(places.size(), unknown(axis, rest));
    return false;
  }

  static std::string unknown(const Axis& axis, std::string_view rest) {
    const std::vector<std::string> labels = labels_of(axis);
    std::string near = nearest(rest, labels);
    if (near.empty()) near = nearest(rest.substr(0, rest.find('.')), labels);
    return fmt::format("'{}' is not on the axis {}{} It has: {}", rest, axis.name, near.empty() ? "." : "; did you mean '" + near + "'?", listed(labels));
  }

  // The fault of the way that came furthest, the first of those.
  void note(std::size_t depth, std::string why) {
    if (!fault_.empty() && depth <= depth_) return;
    fault_ = std::move(why);
    depth_ = depth;
  }

  std::vector<const Axis*> axes_;
  std::string fault_;
  std::size_t depth_ = 0;
};

std::optional<std::size_t> time_row(const Axis& time, std::string_view moment, std::string& fault) {
  const QuantityReading reading = parse_quantity(moment);
  if (!reading.ok || !convertible(reading.quantity.unit, time.units)) {
    fault = fmt::format("'{}' is no moment; write a stored time, such as 12 h, or last", moment);
    return std::nullopt;
  }
  double asked = 0;  // [h]
  try {
    asked = convert(reading.quantity, time.units);
  } catch (const std::invalid_argument& beyond) {
    fault = fmt::format("'{}': {}", moment, beyond.what());
    return std::nullopt;
  }
  std::size_t best = 0;
  for (std::size_t k = 1; k < time.size(); ++k)
    if (std::abs(time.values[k] - asked) < std::abs(time.values[best] - asked)) best = k;
  if (std::abs(time.values[best] - asked) <= time_rounding * std::max(std::abs(asked), time.values.size() > 1 ? time.values[1] - time.values[0] : 1)) return best;
  fault = fmt::format("{} is not a stored time; the nearest is {:.6g} {}", moment, time.values[best], time.units);
  return std::nullopt;
}

// The row of a moment. `names`: of the rows of a beaker; null elsewhere.
std::optional<std::size_t> row_of(const Axis& axis, const TextTable* names, std::string_view moment, std::string& fault) {
  if (axis.size() == 0) {
    fault = fmt::format("the axis {} is empty", axis.name);
    return std::nullopt;
  }
  if (names)
    for (std::size_t k = 0; k < names->values.size(); ++k)
      if (names->values[k] == moment) return k;
  if (moment.empty() || moment == "last") return axis.size() - 1;
  if (names) {
    const std::string near = did_you_mean(moment, names->values);
    fault = fmt::format("'{}' is no step{} There is: {}", moment, near.empty() ? "." : near, listed(names->values));
    return std::nullopt;
  }
  if (axis.name == "time") return time_row(axis, moment, fault);
  const std::string_view number = moment.starts_with("rung ") ? moment.substr(5) : moment;
  for (std::size_t k = 0; k < axis.size(); ++k)
    if (label_of(axis, k) == number) return k;
  fault = fmt::format("'{}' is no rung; there are 1 to {}", moment, axis.size());
  return std::nullopt;
}

// The variable a name means at a moment ("" for none): the steady twin goes first where no moment is asked for.
const Variable* variable_of(const ResultSet& results, std::string_view name, std::string_view moment, std::string& fault) {
  if (moment.empty())
    if (const Variable* steady = find_variable(results, "steady_" + std::string(name))) return steady;
  if (const Variable* found = find_variable(results, name)) return found;
  std::vector<std::string> names;
  for (const Variable& one : results.variables) names.push_back(one.name);
  if (find_flags(results, name) || find_texts(results, name) || find_axis(results, name))
    fault = fmt::format("'{}' is no number but {}", name, find_flags(results, name) ? "a flag" : find_texts(results, name) ? "a text" : "an axis");
  else if (const std::string near = did_you_mean(name, names); !near.empty())
    fault = fmt::format("there is no variable '{}'{}", name, near);
  else
    fault = fmt::format("there is no variable '{}'; there is, among others: {}", name, listed(names));
  return nullptr;
}

}  // namespace

std::optional<NamedValue> find_value(const ResultSet& results, std::string_view name, std::string& fault) {
  const std::size_t at = name.rfind('@');
  const std::string_view what = name.substr(0, at);
  const std::string_view moment = at == std::string_view::npos ? std::string_view() : name.substr(at + 1);
  const std::size_t point = what.find('.');
  const auto refuse = [&](const std::string& why) {
    fault = fmt::format("'{}': {}", name, why);
    return std::nullopt;
  };
  std::string why;
  if (at != std::string_view::npos && moment.empty()) return refuse("a moment is missing behind the '@'; write for example @12 h or @last");
  const Variable* variable = variable_of(results, what.substr(0, point), moment, why);
  if (!variable) return refuse(why);
  std::vector<const Axis*> labelled;
  bool moments = false;
  for (const std::string& axis : variable->axes) {
    if (!is_moment(axis)) labelled.push_back(find_axis(results, axis));
    moments = moments || is_moment(axis);
  }
  if (!moment.empty() && !moments) return refuse(fmt::format("{} has one value only, not one a moment; leave '@{}' out", variable->name, moment));
  LabelReader labels(std::move(labelled));
  const auto places = labels.read(point == std::string_view::npos ? std::string_view() : what.substr(point + 1));
  if (!places) return refuse(labels.fault());
  std::size_t index = 0, next = 0;
  for (const std::string& name_of_axis : variable->axes) {
    const Axis& axis = *find_axis(results, name_of_axis);
    const auto row = is_moment(axis.name) ? row_of(axis, axis.name == "step" ? find_texts(results, "step_name") : nullptr, moment, why) : (*places)[next++];
    if (!row) return refuse(why);
    index = index * axis.size() + *row;
  }
  return NamedValue{variable->values[index], variable->units, variable->long_name};
}

}  // namespace leat
