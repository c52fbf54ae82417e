#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/result_tables_parts.hpp"
#include "sim/results/result_view.hpp"

namespace leat {
namespace {

using Cell = TextTableWriter::Cell;
using Row = std::vector<Cell>;

constexpr double least_family = 5e-6;       // share of a metal from which on a family has a column [1]
constexpr int rows_of_history = 13;         // on a terminal
const char* const free_ligands[] = {"NH3", "CN^-", "Cl^-", "O2"};

double ratio(double part, double whole) { return whole > 0 ? part / whole : std::nan(""); }

// kg/m3 as mg/L.
double milligrams(double kilograms_per_cubic_metre) { return 1000 * kilograms_per_cubic_metre; }

ResultTable stream_table(const ResultView& view, const Moment& now) {
  ResultTable table{"streams", "Streams " + now.words() + " (metals dissolved in the liquor)",
                    {{"stream", ""}, {"from", ""}, {"to", ""}, {"pulp", "m3/h"}, {"liquor", "m3/h"}, {"solids", "t/h"}, {"solids", "%"}, {"pH", ""}}, {}, ""};
  for (const std::string& metal : view.labels("element")) table.columns.push_back({metal, "mg/L"});
  for (std::size_t s = 0; s < view.size("stream"); ++s) {
    const std::string from = view.text("stream_from", s), to = view.text("stream_to", s), leaves = view.text("stream_leaves_as", s);
    const double liquor = now.at("stream_liquor_flow", {s}), solids = now.at("stream_solids_flow", {s});
    Row row = {view.labels("stream")[s], from.empty() ? "-" : from, to.empty() ? (leaves.empty() ? "-" : "> " + leaves) : to,
               now.at("stream_pulp_flow", {s}) * seconds_an_hour, liquor * seconds_an_hour, solids * seconds_an_hour / 1000,
               percent(ratio(solids, now.at("stream_mass_flow", {s}))), now.at("stream_ph", {s})};
    for (std::size_t e = 0; e < view.size("element"); ++e) row.push_back(milligrams(ratio(now.at("stream_metal_dissolved", {s, e}), liquor)));
    table.rows.push_back(std::move(row));
  }
  return table;
}

// The stream a vessel's pulp leaves by: its first outlet.
std::size_t outlet_of(const ResultView& view, const std::string& vessel) {
  const TextTable* from = find_texts(view.results(), "stream_from");
  if (!from) return view.size("stream");
  return static_cast<std::size_t>(std::find(from->values.begin(), from->values.end(), vessel) - from->values.begin());
}

ResultTable stage_table(const ResultView& view, const Moment& now) {
  ResultTable table{"stages", "Stage profile " + now.words(),
                    {{"vessel", ""}, {"volume", "m3"}, {"time", "h"}, {"T", "degC"}, {"pH", ""}, {"I", "mol/kg"}, {"density", "kg/m3"}}, {}, ""};
  const std::vector<std::string>& species = view.labels("species");
  std::vector<std::size_t> ligands;
  for (const char* name : free_ligands) {
    const auto found = std::find(species.begin(), species.end(), name);
    if (found == species.end()) continue;
    ligands.push_back(static_cast<std::size_t>(found - species.begin()));
    table.columns.push_back({std::string("free ") + name, "mol/kg"});
  }
  for (const std::string& metal : view.labels("element")) table.columns.push_back({metal + " left", "%"});
  table.columns.push_back({"formed", ""});
  for (std::size_t u = 0; u < view.size("unit"); ++u) {
    const double volume = now.at("pulp_volume", {u});
    Row row = {view.labels("unit")[u], volume, ratio(volume, now.at("outlet_flow", {u})) / seconds_an_hour, now.at("temperature", {u}) - zero_celsius,
               now.at("ph", {u}), now.at("ionic_strength", {u}), now.at("liquor_density", {u})};
    for (const std::size_t i : ligands) row.push_back(now.at("molality", {u, i}));
    const std::size_t outlet = outlet_of(view, view.labels("unit")[u]);
    for (std::size_t e = 0; e < view.size("element"); ++e)
      row.push_back(percent(ratio(now.at("stream_metal_undissolved", {outlet, e}), view.at("fed", {e}))));
    std::vector<std::string> formed;
    for (std::size_t m = 0; m < view.size("mineral"); ++m)
      if (now.at("formed", {u, m}) > 0) formed.push_back(view.labels("mineral")[m]);
    row.push_back(listed(formed));
    table.rows.push_back(std::move(row));
  }
  table.note = view.size("element") > 0 && !table.rows.empty() ? "left: still in fed minerals in the pulp that leaves the vessel, of the metal fed" : "";
  return table;
}

ResultTable recovery_table(const ResultView& view, const Moment& now) {
  const std::vector<std::string>& families = view.labels("family");
  ResultTable table{"recovery",
                    fmt::format("Recovery into {} by family of complexes, {}", view.attribute("leat_pregnant_liquor"), now.steady() ? "steady" : now.words()),
                    {{"metal", ""}, {"fed", "kg/h"}, {"extraction", "%"}, {"formed, leaving", "%"}, {"recovery", "%"}}, {}, ""};
  std::vector<std::size_t> shown;
  for (std::size_t f = 0; f < families.size(); ++f) {
    bool any = false;
    for (std::size_t e = 0; e < view.size("element"); ++e) any = any || now.at("recovery_by_family", {e, f}) > least_family;
    if (!any) continue;
    shown.push_back(f);
    table.columns.push_back({"as " + families[f], "%"});
  }
  for (std::size_t e = 0; e < view.size("element"); ++e) {
    Row row = {view.labels("element")[e], view.at("fed", {e}) * seconds_an_hour, percent(now.at("extraction", {e})),
               percent(now.at("formed_leaving", {e})), percent(now.at("recovery", {e}))};
    for (const std::size_t f : shown) row.push_back(percent(now.at("recovery_by_family", {e, f})));
    table.rows.push_back(std::move(row));
  }
  return table;
}

// Where each metal goes: dissolved, formed and undissolved in each stream that leaves.
ResultTable metal_table(const ResultView& view, const Moment& now) {
  ResultTable table{"metals", "Where each metal goes, " + now.words() + " (% of the metal fed)",
                    {{"metal", ""}, {"leaves in", ""}, {"dissolved", "kg/h"}, {"formed", "kg/h"}, {"undissolved", "kg/h"},
                     {"dissolved", "%"}, {"formed", "%"}, {"undissolved", "%"}}, {}, ""};
  const auto add = [&](const std::string& metal, const std::string& where, const std::vector<double>& flows, double fed) {
    Row row = {metal, where};
    for (const double flow : flows) row.push_back(flow * seconds_an_hour);
    for (const double flow : flows) row.push_back(percent(ratio(flow, fed)));
    table.rows.push_back(std::move(row));
  };
  for (std::size_t e = 0; e < view.size("element"); ++e) {
    const std::string& metal = view.labels("element")[e];
    const double fed = view.at("fed", {e});
    std::vector<double> all(3, 0.0);
    for (std::size_t s = 0; s < view.size("stream"); ++s) {
      if (!view.text("stream_to", s).empty() || view.text("stream_leaves_as", s).empty()) continue;
      const std::vector<double> flows = {now.at("stream_metal_dissolved", {s, e}), now.at("stream_metal_formed", {s, e}), now.at("stream_metal_undissolved", {s, e})};
      for (std::size_t k = 0; k < flows.size(); ++k) all[k] += flows[k];
      add(metal, view.text("stream_leaves_as", s), flows, fed);
    }
    add(metal, "all", all, fed);
  }
  table.note = fmt::format("Dissolved in {} is recovery; dissolved in any other stream that leaves is soluble loss.", view.attribute("leat_pregnant_liquor"));
  return table;
}

ResultTable reagent_table(const ResultView& view, const Moment& now) {
  ResultTable table{"reagents", "Reagents", {{"reagent", ""}, {"counted as", ""}, {"rate", "kg/h"}, {"use", "kg/t solids"}}, {}, ""};
  const double solids = view.at("dry_solids", {});
  for (std::size_t s = 0; s < view.size("stream"); ++s) {
    const double rate = view.at("reagent_rate", {s});
    if (!std::isnan(rate))
      table.rows.push_back({view.labels("stream")[s], view.text("reagent_counted_as", s), rate * seconds_an_hour, 1000 * view.at("reagent_consumption", {s})});
  }
  // What dissolves from gases is a reagent too: all vessels together.
  int vessels = 0;
  for (std::size_t u = 0; u < view.size("unit"); ++u) vessels += !std::isnan(now.at("oxygen_taken_up", {u}));
  for (std::size_t j = 0; j < view.size("component"); ++j) {
    const double rate = now.at("gas_taken_up", {j});
    const std::string& name = view.labels("component")[j];
    if (std::isnan(rate)) continue;
    const std::string from = vessels > 0 ? fmt::format("from air, {} vessel{}", vessels, vessels > 1 ? "s" : "") : std::string("from air");
    table.rows.push_back({from, name, rate * seconds_an_hour, 1000 * ratio(rate, solids)});
  }
  return table;
}

ResultTable history_table(const ResultView& view) {
  ResultTable table{"history", "Through time", {{"time", "h"}}, {}, ""};
  table.terminal_rows = rows_of_history;
  for (const std::string& metal : view.labels("element")) {
    table.columns.push_back({metal + " recovery", "%"});
    table.columns.push_back({metal + " to date", "%"});
  }
  const std::size_t vessels = view.size("unit");
  if (vessels > 0) table.columns.push_back({"pH " + view.labels("unit").back(), ""});
  const Axis* time = find_axis(view.results(), "time");
  if (!time || view.attribute("leat_mode") == "steady") return table;
  for (std::size_t k = 0; k < time->values.size(); ++k) {
    Row row = {time->values[k]};
    for (std::size_t e = 0; e < view.size("element"); ++e) {
      row.push_back(percent(view.at("recovery", {k, e})));
      row.push_back(percent(view.at("recovery_to_date", {k, e})));
    }
    if (vessels > 0) row.push_back(view.at("ph", {k, vessels - 1}));
    table.rows.push_back(std::move(row));
  }
  return table;
}

ResultTable closure_table(const ResultView& view, const Moment& now) {
  ResultTable table{"closure", "Closure (computed afresh from states and flows)",
                    {{"closure", ""}, {"elements", "1"}, {"water", "1"}, {"mass", "1"}, {"charge", "1"}, {"mass action", "ln"}, {"cells", "1"}}, {}, "", 2};
  const char* const names[] = {"closure_elements", "closure_water", "closure_mass", "closure_charge", "closure_mass_action", "closure_cells"};
  if (now.steady()) {
    Row row = {"steady"};
    for (const char* name : names) row.push_back(now.at(name, {}));
    table.rows.push_back(std::move(row));
  }
  if (view.attribute("leat_mode") == "steady") return table;
  Row row = {"through time, worst"};
  for (const char* name : names) {
    double worst = 0;
    for (std::size_t k = 1; k < view.size("time"); ++k) worst = std::fmax(worst, view.at(name, {k}));  // the start is given, not solved
    row.push_back(worst);
  }
  table.rows.push_back(std::move(row));
  return table;
}

}  // namespace

std::vector<ResultTable> run_tables(const ResultSet& results) {
  const ResultView view(results);
  const Moment now(view);
  return {stream_table(view, now), stage_table(view, now), recovery_table(view, now), metal_table(view, now),
          reagent_table(view, now), history_table(view), closure_table(view, now)};
}

}  // namespace leat
