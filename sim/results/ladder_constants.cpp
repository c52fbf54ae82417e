#include "sim/results/ladder_constants.hpp"

#include <fmt/format.h>

#include <cmath>
#include <map>
#include <set>

#include "models/core/check.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

constexpr const char* numbers[] = {"constant_log10_k", "constant_temperature", "constant_ionic_strength", "constant_spread", "constant_enthalpy"};
constexpr const char* texts[] = {"constant_reaction", "constant_key", "constant_source", "constant_evidence"};

struct Row {
  std::string name, series;
  std::size_t rung = 0;
  std::vector<double> numbers;
  std::vector<std::string> texts;

  // All that is written, so that equal rows are one; missing values are equal.
  std::string identity() const {
    std::string text = name;
    for (double value : numbers) text += fmt::format("\n{:a}", std::isnan(value) ? std::nan("") : value);
    for (const std::string& one : texts) text += "\n" + one;
    return text;
  }
};

std::vector<Row> rows_of(const std::vector<ConstantsOf>& cases) {
  std::vector<Row> rows;
  std::set<std::string> seen;
  for (const ConstantsOf& one : cases) {
    const Axis* axis = find_axis(*one.results, "constant");
    check(axis != nullptr, "a case without constants");
    for (std::size_t k = 0; k < axis->labels.size(); ++k) {
      Row row{axis->labels[k], one.series, one.rung, {}, {}};
      for (const char* name : numbers) row.numbers.push_back(find_variable(*one.results, name)->values.at(k));
      for (const char* name : texts) row.texts.push_back(find_texts(*one.results, name)->values.at(k));
      if (seen.insert(row.identity()).second) rows.push_back(std::move(row));
    }
  }
  return rows;
}

// Labels of the rows, each once: as long as they have to be.
std::vector<std::string> labels_of(const std::vector<Row>& rows) {
  std::map<std::string, int> of_name, of_series;
  const auto with_series = [](const Row& row) { return fmt::format("{} ({})", row.name, row.series); };
  for (const Row& row : rows) ++of_name[row.name], ++of_series[with_series(row)];
  std::vector<std::string> labels;
  for (const Row& row : rows) {
    if (of_name[row.name] == 1) labels.push_back(row.name);
    else if (of_series[with_series(row)] == 1) labels.push_back(with_series(row));
    else labels.push_back(fmt::format("{} ({}, rung {})", row.name, row.series, row.rung));
  }
  return labels;
}

}  // namespace

void add_constants(ResultSet& set, const std::vector<ConstantsOf>& cases) {
  const std::vector<Row> rows = rows_of(cases);
  set.axes.push_back({"constant", "species or solid an equilibrium constant belongs to", "", labels_of(rows), {}, false});
  static const std::vector<std::pair<const char*, const char*>> meanings = {{"decadic logarithm of the constant, as measured", "1"}, {"temperature of the measurement", "K"},
                                                                            {"ionic strength of the measurement", "mol kg-1"}, {"half-width of published values, decadic", "1"},
                                                                            {"reaction enthalpy", "J mol-1"}};
  for (std::size_t k = 0; k < std::size(numbers); ++k) {
    Variable variable{numbers[k], meanings[k].first, meanings[k].second, {"constant"}, {}};
    for (const Row& row : rows) variable.values.push_back(row.numbers[k]);
    set.variables.push_back(std::move(variable));
  }
  static const std::vector<const char*> words = {"reaction of the constant", "short name of the source", "source of the constant", "how well the source is known"};
  for (std::size_t k = 0; k < std::size(texts); ++k) {
    TextTable table{texts[k], words[k], "constant", {}};
    for (const Row& row : rows) table.values.push_back(row.texts[k]);
    set.texts.push_back(std::move(table));
  }
}

}  // namespace leat
