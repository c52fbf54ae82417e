#include "sim/results/ladder_liquor.hpp"

#include <algorithm>
#include <cmath>
#include <optional>

#include "models/core/check.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

// The values of a variable from `row` on along its first axis.
std::vector<double> row_of(const ResultSet& results, const std::string& name, std::size_t row) {
  const Variable* variable = find_variable(results, name);
  check(variable && !variable->axes.empty(), "a ladder looks for " + name);
  const std::size_t rows = axis_size(results, variable->axes.front());
  check(row < rows, "a ladder looks beyond the rows of " + name);
  const std::size_t size = variable->values.size() / rows;
  const auto begin = variable->values.begin() + static_cast<std::ptrdiff_t>(row * size);
  return {begin, begin + static_cast<std::ptrdiff_t>(size)};
}

double one_of(const ResultSet& results, const std::string& name, std::size_t row) { return row_of(results, name, row).at(0); }

double largest(const ResultSet& results, std::initializer_list<const char*> names) {
  double most = 0;
  for (const char* name : names)
    for (double value : find_variable(results, name)->values) most = std::fmax(most, std::abs(value));
  return most;
}

std::optional<std::size_t> place_of(const ResultSet& results, const char* axis, const std::string& label) {
  const std::vector<std::string>& labels = find_axis(results, axis)->labels;
  const auto found = std::find(labels.begin(), labels.end(), label);
  return found == labels.end() ? std::nullopt : std::optional(static_cast<std::size_t>(found - labels.begin()));
}

// The stream that leaves the vessel a stream's liquor comes from; that vessel's label is stream_from. Nothing where it is fed
// from outside or mixed of several.
std::optional<std::size_t> upstream(const ResultSet& results, std::size_t stream) {
  const std::vector<std::string>& from = find_texts(results, "stream_from")->values;
  const std::vector<std::string>& to = find_texts(results, "stream_to")->values;
  for (std::size_t steps = 0; steps <= from.size(); ++steps) {  // a loop without a vessel has no beginning
    if (from[stream].empty()) return std::nullopt;
    if (place_of(results, "unit", from[stream])) return stream;
    const auto taken = std::count(to.begin(), to.end(), from[stream]);
    if (taken != 1) return std::nullopt;
    stream = static_cast<std::size_t>(std::find(to.begin(), to.end(), from[stream]) - to.begin());
  }
  return std::nullopt;
}

void divide(std::vector<double>& amounts, double volume) {
  for (double& amount : amounts) amount = volume > 0 ? amount / volume : std::nan("");
}

LadderLiquor of_run(const ResultSet& results) {
  const auto stream = place_of(results, "stream", attribute(results, "leat_pregnant_liquor"));
  check(stream.has_value(), "a ladder looks for the pregnant liquor");
  LadderLiquor liquor{};
  liquor.ph = one_of(results, "steady_stream_ph", *stream);
  liquor.ionic_strength = one_of(results, "steady_stream_ionic_strength", *stream);
  liquor.molality = find_variable(results, "steady_pregnant_liquor_molality")->values;
  liquor.dissolved = row_of(results, "steady_stream_dissolved", *stream);
  divide(liquor.dissolved, one_of(results, "steady_stream_liquor_flow", *stream));
  liquor.closure = largest(results, {"steady_closure_elements", "steady_closure_water", "steady_closure_mass", "steady_closure_charge", "steady_closure_mass_action",
                                     "steady_closure_cells"});
  const std::vector<double> none(axis_size(results, "mineral"), std::nan(""));
  liquor.temperature = std::nan("");
  liquor.formed = liquor.saturation_index = none;
  if (const auto source = upstream(results, *stream)) {
    const std::size_t vessel = *place_of(results, "unit", find_texts(results, "stream_from")->values[*source]);
    liquor.temperature = one_of(results, "steady_temperature", vessel);
    liquor.saturation_index = row_of(results, "steady_saturation_index", vessel);
    liquor.formed = row_of(results, "steady_stream_formed", *source);
    divide(liquor.formed, one_of(results, "steady_stream_liquor_flow", *source));
  }
  return liquor;
}

LadderLiquor of_beaker(const ResultSet& results, const std::string& step) {
  const std::vector<std::string>& names = find_texts(results, "step_name")->values;
  const auto named = std::find(names.begin(), names.end(), step);
  check(step.empty() || named != names.end(), "a ladder looks for a step that is not there");
  const std::size_t row = step.empty() ? names.size() - 1 : static_cast<std::size_t>(named - names.begin());
  LadderLiquor liquor{};
  liquor.ph = one_of(results, "ph", row);
  liquor.ionic_strength = one_of(results, "ionic_strength", row);
  liquor.temperature = one_of(results, "temperature", row);
  liquor.molality = row_of(results, "molality", row);
  liquor.dissolved = row_of(results, "dissolved", row);
  liquor.formed = row_of(results, "formed", row);
  liquor.saturation_index = row_of(results, "saturation_index", row);
  const double volume = one_of(results, "liquor_volume", row);  // [m3]
  divide(liquor.dissolved, volume);
  divide(liquor.formed, volume);
  liquor.closure = largest(results, {"closure_cells", "closure_mass_action"});
  return liquor;
}

}  // namespace

LadderLiquor liquor_of(const ResultSet& results, const std::string& step) {
  return attribute(results, "leat_kind") == "beaker" ? of_beaker(results, step) : of_run(results);
}

}  // namespace leat
