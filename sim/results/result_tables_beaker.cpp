#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/result_tables_parts.hpp"
#include "sim/results/result_view.hpp"

namespace leat {
namespace {

using Row = std::vector<TextTableWriter::Cell>;

constexpr double least_share = 0.1;    // of a dissolved total from which on a species has a row [%]
constexpr double least_present = 1e-12;  // of a component, per water: less is none [mol/mol]
constexpr double at_saturation = 1e-9;   // index that is shown as 0 [log10]

std::size_t steps_of(const ResultView& view) { return view.size("step"); }

void add_step_columns(const ResultView& view, const char* unit, ResultTable& table) {
  for (std::size_t k = 0; k < steps_of(view); ++k) table.columns.push_back({view.text("step_name", k), unit});
}

ResultTable step_table(const ResultView& view) {
  ResultTable table{"steps", "Steps",
                    {{"step", ""}, {"T", "degC"}, {"volume", "L"}, {"density", "kg/m3"}, {"pH", ""}, {"I", "mol/kg"}, {"solids", ""}, {"dosed", ""}}, {}, ""};
  for (std::size_t k = 0; k < steps_of(view); ++k) {
    std::vector<std::string> solids;
    for (std::size_t m = 0; m < view.size("mineral"); ++m) {
      const double amount = view.at("formed", {k, m});
      if (amount > 0) solids.push_back(fmt::format("{} {} g", view.labels("mineral")[m], significant(1000 * amount * view.at("mineral_mass", {m}))));
    }
    const double dose = view.at("dosed", {k}), protons = view.at("proton_added", {k});
    std::string dosed = std::isnan(dose) ? "-" : fmt::format("{} mol {}", significant(dose), view.text("dosed_compound", k));
    if (protons != 0 && !std::isnan(protons)) dosed = fmt::format("{} mol H^+", significant(protons));
    table.rows.push_back({view.text("step_name", k), view.at("temperature", {k}) - zero_celsius, 1000 * view.at("liquor_volume", {k}),
                          view.at("liquor_density", {k}), view.at("ph", {k}), view.at("ionic_strength", {k}), listed(solids), dosed});
  }
  return table;
}

// Components that are told: all but H and water.
std::vector<std::size_t> told_components(const ResultView& view) {
  std::vector<std::size_t> told;
  for (std::size_t j = 0; j < view.size("component"); ++j) {
    const std::string role = view.text("component_role", j);
    if (role != "proton" && role != "water") told.push_back(j);
  }
  return told;
}

ResultTable dissolved_table(const ResultView& view) {
  ResultTable table{"dissolved", "Dissolved, all forms together", {{"total", ""}}, {}, ""};
  add_step_columns(view, "mol/L", table);
  for (const std::size_t j : told_components(view)) {
    Row row = {view.labels("component")[j]};
    for (std::size_t k = 0; k < steps_of(view); ++k) row.push_back(std::max(0.0, view.at("dissolved", {k, j})) / view.at("liquor_volume", {k}) / 1000);
    table.rows.push_back(std::move(row));
  }
  return table;
}

// Who holds each component: share of its dissolved total in each species, the larger ones.
ResultTable holder_table(const ResultView& view) {
  ResultTable table{"holders", "Who holds what, of the dissolved total (species with at least 0.1 % somewhere)", {{"total", ""}, {"held by", ""}}, {}, ""};
  add_step_columns(view, "%", table);
  const std::size_t water = view.size("component") - 1;
  for (const std::size_t j : told_components(view)) {
    std::vector<double> whole;
    for (std::size_t k = 0; k < steps_of(view); ++k) {
      double sum = 0;  // mol/kg
      for (std::size_t i = 0; i < view.size("species"); ++i) sum += view.at("species_content", {i, j}) * view.at("molality", {k, i});
      whole.push_back(view.at("dissolved", {k, j}) > least_present * view.at("dissolved", {k, water}) ? sum : std::nan(""));
    }
    for (std::size_t i = 0; i < view.size("species"); ++i) {
      const double content = view.at("species_content", {i, j});
      if (!(content > 0)) continue;
      Row row = {view.labels("component")[j], view.labels("species")[i]};
      double most = 0;
      for (std::size_t k = 0; k < steps_of(view); ++k) {
        const double share = percent(content * view.at("molality", {k, i}) / whole[k]);
        row.push_back(share);
        most = std::fmax(most, share);
      }
      if (most >= least_share) table.rows.push_back(std::move(row));
    }
  }
  return table;
}

ResultTable saturation_table(const ResultView& view) {
  ResultTable table{"saturation", "Saturation index", {{"solid", ""}, {"may form", ""}}, {}, "", 3};
  add_step_columns(view, "log10", table);
  const Flags* may_form = find_flags(view.results(), "may_form");
  for (std::size_t m = 0; m < view.size("mineral"); ++m) {
    Row row = {view.labels("mineral")[m], may_form && may_form->values[m] != 0 ? "yes" : "watched"};
    for (std::size_t k = 0; k < steps_of(view); ++k) {
      const double index = view.at("saturation_index", {k, m});
      row.push_back(std::abs(index) < at_saturation ? 0.0 : index);
    }
    table.rows.push_back(std::move(row));
  }
  return table;
}

ResultTable closure_table(const ResultView& view) {
  ResultTable table{"closure", "Closure", {{"step", ""}, {"balance", "1"}, {"mass action", "ln"}}, {}, "", 2};
  for (std::size_t k = 0; k < steps_of(view); ++k)
    table.rows.push_back({view.text("step_name", k), view.at("closure_cells", {k}), view.at("closure_mass_action", {k})});
  return table;
}

}  // namespace

std::vector<ResultTable> beaker_tables(const ResultSet& results) {
  const ResultView view(results);
  return {step_table(view), dissolved_table(view), holder_table(view), saturation_table(view), closure_table(view)};
}

}  // namespace leat
