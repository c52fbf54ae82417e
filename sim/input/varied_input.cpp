#include <fmt/format.h>

#include <algorithm>
#include <charconv>
#include <cmath>
#include <set>
#include <stdexcept>

#include "models/core/quantity.hpp"
#include "sim/input/read_study.hpp"
#include "sim/input/scalar_text.hpp"
#include "sim/input/study_reader.hpp"

namespace leat {
namespace {

constexpr const char* sentence_example = "0.5 mol/L to 6 mol/L in 12 points";
constexpr const char* list_example = "[2, 3, 4]";

std::string_view trim(std::string_view text) {
  const std::size_t begin = text.find_first_not_of(" \t\r\n");
  if (begin == std::string_view::npos) return {};
  return text.substr(begin, text.find_last_not_of(" \t\r\n") + 1 - begin);
}

std::vector<std::string> words_of(std::string_view text) {
  std::vector<std::string> words;
  for (text = trim(text); !text.empty(); text = trim(text)) {
    const std::size_t end = std::min(text.find_first_of(" \t\r\n"), text.size());
    words.emplace_back(text.substr(0, end));
    text.remove_prefix(end);
  }
  return words;
}

// The number as it is typed, in the shortest form that reads back equal.
std::string written_number(double number) { return number == 0 ? "0" : fmt::format("{}", number); }

// One end of a range: a number, its unit, and `as NaCN` behind it if it is so typed.
struct End {
  Quantity quantity;
  std::string counted_as;  // with its ` as `
};

class SentenceReader {
 public:
  SentenceReader(std::string_view sentence, const Place& place, Diagnostics& diagnostics)
      : sentence_(trim(sentence)), place_(place), diagnostics_(diagnostics) {}

  std::optional<VariedInput> read() {
    const std::size_t in = sentence_.rfind(" in ");
    const std::size_t to = sentence_.find(" to ");
    if (sentence_.empty()) return refuse(Code::wrong_kind, "nothing to vary it over");
    if (to == std::string_view::npos || (in != std::string_view::npos && to > in))
      return refuse(Code::wrong_kind, in == std::string_view::npos ? "is one value, not a range" : "has no 'to'");
    if (in == std::string_view::npos || in < to + 4) return refuse(Code::wrong_kind, "does not say in how many points");
    VariedInput out;
    out.place = place_;
    const auto from = end(sentence_.substr(0, to));
    const auto until = end(sentence_.substr(to + 4, in - to - 4));
    const auto count = points(words_of(sentence_.substr(in + 4)), out.logarithmic);
    if (!from || !until || !count || !one_unit(*from, *until) || !ends(*from, *until, out.logarithmic)) return std::nullopt;
    out.unit = until->quantity.unit;
    const std::string behind = (out.unit.empty() ? "" : " " + out.unit) + until->counted_as;
    out.numbers = steps(from->quantity.number, until->quantity.number, *count, out.logarithmic);
    for (double number : out.numbers) out.values.push_back(written_number(number) + behind);
    if (std::adjacent_find(out.numbers.begin(), out.numbers.end()) != out.numbers.end())
      return refuse(Code::out_of_range, "has points too close to be told apart");
    return out;
  }

 private:
  std::nullopt_t refuse(Code code, const std::string& why) {
    diagnostics_.fault(code, place_, fmt::format("'{}' {}; write for example {}, or a list {}", shown_text(sentence_), why, sentence_example, list_example));
    return std::nullopt;
  }

  std::optional<End> end(std::string_view text) {
    text = trim(text);
    const std::size_t as = text.find(" as ");
    const QuantityReading reading = parse_quantity(text.substr(0, as));
    if (!reading.ok) {
      diagnostics_.fault(Code::bad_quantity, place_, fmt::format("{}, in '{}'; write for example {}", reading.fault, shown_text(sentence_), sentence_example));
      return std::nullopt;
    }
    return End{reading.quantity, as == std::string_view::npos ? "" : " as " + std::string(trim(text.substr(as + 4)))};
  }

  std::optional<int> points(const std::vector<std::string>& words, bool& logarithmic) {
    logarithmic = words.size() == 3 && words[1] == "logarithmic";
    if (words.empty() || words.back() != "points" || words.size() > 3 || (words.size() == 3 && !logarithmic))
      return refuse(Code::wrong_kind, "does not end with 'in N points' or 'in N logarithmic points'");
    long count = 0;
    const char* const last = words[0].data() + words[0].size();
    const auto [stop, error] = std::from_chars(words[0].data(), last, count);
    if (stop != last || error == std::errc::invalid_argument || words.size() < 2)
      return refuse(Code::bad_quantity, "has no whole number of points");
    if (error != std::errc() || count < 2 || count > most_points)
      return refuse(Code::out_of_range, fmt::format("takes {} points; allowed is 2 to {}", words[0], most_points));
    return static_cast<int>(count);
  }

  // The unit may stand at both ends, then the same, or behind the last alone.
  bool one_unit(const End& from, const End& until) {
    const bool bare = from.quantity.unit.empty() && from.counted_as.empty();
    if (!bare && (from.quantity.unit != until.quantity.unit || from.counted_as != until.counted_as))
      return refuse(Code::wrong_unit, "has two units; write both ends in the same unit, or the unit behind the last alone"), false;
    return true;
  }

  bool ends(const End& from, const End& until, bool logarithmic) {
    if (from.quantity.number == until.quantity.number) return refuse(Code::out_of_range, "starts where it ends"), false;
    if (logarithmic && !(from.quantity.number > 0 && until.quantity.number > 0))
      return refuse(Code::out_of_range, "has an end that is not above 0, and logarithmic points need both above 0"), false;
    return true;
  }

  // Both ends as typed; between them as few digits as keep each point within a thousandth of its step: these numbers are typed
  // into cases, and read by people.
  static std::vector<double> steps(double from, double to, int count, bool logarithmic) {
    const double step = std::abs(to / 2 - from / 2) / (count - 1) * 2;  // halves: the ends may be as far apart as numbers go
    std::vector<double> out;
    for (int k = 0; k < count; ++k) {
      const double share = static_cast<double>(k) / (count - 1);
      double value = logarithmic ? std::exp(std::log(from) * (1 - share) + std::log(to) * share) : from * (1 - share) + to * share;
      if (!logarithmic && std::abs(value) < 1e-9 * step) value = 0;
      const double near = logarithmic ? std::abs(value) * (std::exp(std::abs(std::log(to) - std::log(from)) / (count - 1)) - 1) : step;
      value = rounded(value, near / 1000);
      out.push_back(value);
    }
    out.front() = from;
    out.back() = to;
    return out;
  }

  // With the fewest significant digits that come this near.
  static double rounded(double value, double near) {
    for (int digits = 1; digits < 17; ++digits) {
      const double written = parse_number(fmt::format("{:.{}g}", value, digits)).value_or(value);
      if (std::abs(written - value) <= near) return written;
    }
    return value;
  }

  std::string_view sentence_;
  const Place& place_;
  Diagnostics& diagnostics_;
};

// Numbers in the unit of the first value, where all are quantities of one kind.
void take_numbers(VariedInput& input) {
  std::vector<double> numbers;
  std::string unit, counted_as;
  for (const std::string& value : input.values) {
    const std::size_t as = std::min(value.find(" as "), value.size());
    const QuantityReading reading = parse_quantity(std::string_view(value).substr(0, as));
    if (numbers.empty()) unit = reading.quantity.unit, counted_as = value.substr(as);
    if (!reading.ok || value.substr(as) != counted_as) return;
    const bool same = reading.quantity.unit == unit;
    if (!same && !convertible(reading.quantity.unit, unit)) return;
    try {
      numbers.push_back(same ? reading.quantity.number : convert(reading.quantity, unit));
    } catch (const std::invalid_argument&) {  // beyond the range of numbers
      return;
    }
  }
  input.numbers = numbers;
  input.unit = unit;
}

}  // namespace

std::optional<VariedInput> read_sentence(std::string_view sentence, const Place& place, Diagnostics& diagnostics) {
  return SentenceReader(sentence, place, diagnostics).read();
}

std::optional<VariedInput> read_value_list(const YamlNode& list, Diagnostics& diagnostics) {
  VariedInput out;
  out.place = list.place;
  TypedReader typed(diagnostics);
  std::set<std::string> seen;
  bool ok = true;
  const auto refuse = [&](Code code, const Place& place, const std::string& why) {
    diagnostics.fault(code, place, why);
    ok = false;
  };
  if (list.items.empty()) refuse(Code::missing_key, list.place, fmt::format("the list is empty; write its values, for example {}", list_example));
  if (list.items.size() > static_cast<std::size_t>(most_points))
    refuse(Code::out_of_range, list.place, fmt::format("the list has {} values; allowed are 1 to {}", list.items.size(), most_points));
  for (const YamlNode& item : list.items) {
    const auto value = typed.text(item);
    if (!value) {
      ok = false;
    } else if (!value_fault(*value).empty()) {
      refuse(Code::bad_yaml, item.place, value_fault(*value));
    } else if (!seen.insert(*value).second) {
      refuse(Code::duplicate, item.place, fmt::format("'{}' stands twice in the list", shown_text(*value)));
    } else {
      out.values.push_back(*value);
    }
  }
  if (!ok) return std::nullopt;
  take_numbers(out);
  return out;
}

std::optional<VariedInput> read_varied(std::string_view sentence, const Place& place, Diagnostics& diagnostics) {
  if (!value_fault(sentence).empty()) {
    diagnostics.fault(Code::bad_yaml, place, value_fault(sentence));
    return std::nullopt;
  }
  const std::size_t sign = sentence.find_first_of(":=");
  const std::string path(trim(sentence.substr(0, sign)));
  if (sign == std::string_view::npos || path.empty()) {
    diagnostics.fault(Code::wrong_kind, place, fmt::format("'{}' names no input; write PATH: FROM to TO in N points, for example "
                                                           "liquors.strong.NH3: {}", shown_text(sentence), sentence_example));
    return std::nullopt;
  }
  const std::string_view values = trim(sentence.substr(sign + 1));
  std::optional<VariedInput> out;
  if (values.starts_with('[') && !values.ends_with(']')) {
    diagnostics.fault(Code::bad_yaml, place, fmt::format("'{}' is a list opened by '[' that is not closed; write for example {}", shown_text(values), list_example));
  } else if (values.starts_with('[')) {
    Diagnostics own;
    const auto list = read_yaml(values, place.file, own);
    if (list && list->is_list()) out = read_value_list(*list, own);
    for (const Diagnostic& one : own.faults()) diagnostics.fault(one.code, place, fmt::format("'{}': {}", shown_text(values), one.text));
  } else {
    out = read_sentence(values, place, diagnostics);
  }
  if (!out) return std::nullopt;
  out->path = path;
  out->place = place;
  return out;
}

}  // namespace leat
