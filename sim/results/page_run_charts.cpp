#include <algorithm>
#include <cmath>
#include <fmt/format.h>

#include "sim/results/page_sections.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

double ratio(double part, double whole) { return whole > 0 ? part / whole : std::nan(""); }

// The first outlet of each vessel, the stream its pulp leaves by.
std::vector<std::size_t> outlets_of(const ResultView& view) {
  std::vector<std::size_t> outlets;
  for (const std::string& vessel : view.labels("unit")) {
    std::size_t s = 0;
    while (s < view.size("stream") && view.text("stream_from", s) != vessel) ++s;
    outlets.push_back(s);
  }
  return outlets;
}

PageChart stage_chart(const ResultView& view, std::string id, std::string title, std::string reading) {
  PageChart chart;
  chart.id = std::move(id);
  chart.title = std::move(title);
  chart.reading = std::move(reading);
  chart.x.title = "vessel";
  chart.labels = view.labels("unit");
  return chart;
}

// Values apart by more than this are shown on a logarithmic axis.
bool wide(const std::vector<ChartSeries>& series) {
  double low = INFINITY, high = 0;
  for (const ChartSeries& one : series)
    for (double value : one.values)
      if (value > 0) low = std::min(low, value), high = std::max(high, value);
  return high > 200 * low;
}

// On a logarithmic axis zero and what is next to nothing have no place.
void drop_traces(std::vector<ChartSeries>& series, double least) {
  for (ChartSeries& one : series)
    for (double& value : one.values)
      if (!(value > least)) value = std::nan("");
}

// The free form of each ligand: the species that holds one of it and of nothing else.
std::vector<std::size_t> free_ligands(const ResultView& view) {
  std::vector<std::size_t> species;
  for (std::size_t c = 0; c < view.size("component"); ++c) {
    if (!of_interest(view, c) || is_metal(view, c) || view.text("component_family", c).empty()) continue;
    for (std::size_t s = 0; s < view.size("species"); ++s) {
      bool alone = view.at("species_content", {s, c}) == 1;
      for (std::size_t other = 0; alone && other < view.size("component"); ++other) alone = other == c || view.at("species_content", {s, other}) == 0;
      if (alone) species.push_back(s);
    }
  }
  return species;
}

std::vector<double> thinned(const std::vector<double>& values, const std::vector<std::size_t>& rows) {
  std::vector<double> out;
  for (std::size_t row : rows) out.push_back(values[row]);
  return out;
}

PageChart time_chart(const ResultView& view, const std::vector<std::size_t>& rows, std::string id, std::string title, std::string reading) {
  PageChart chart;
  chart.id = std::move(id);
  chart.title = std::move(title);
  chart.reading = std::move(reading);
  chart.x = {"time, h", "h"};
  chart.numbers = thinned(find_axis(view.results(), "time")->values, rows);
  const std::size_t all = view.size("time");
  if (rows.size() < all) chart.table_note = fmt::format("{} of {} stored moments, evenly picked; the results file holds them all.", rows.size(), all);
  return chart;
}

}  // namespace

void add_stage_charts(PageBuilder& page, const ResultView& view, const Moment& now) {
  const std::vector<std::size_t> outlets = outlets_of(view);
  PageChart left = stage_chart(view, "left-by-stage", "Metal not yet dissolved, by stage",
                               "Of each metal fed, what is still in fed minerals in the pulp that leaves the vessel; a stage that hardly lowers it is not earning its volume.");
  PageChart dissolved = stage_chart(view, "dissolved-by-stage", "Metal dissolved, by stage", "Concentration in the liquor that leaves each vessel.");
  ChartView undissolved_view{"", {"% of metal fed", "%", false, false, 0.0, {}}, {}, {}}, dissolved_view{"", {"mg/L", "mg/L"}, {}, {}};
  for (std::size_t e = 0; e < view.size("element"); ++e) {
    ChartSeries undissolved{view.labels("element")[e], {}, static_cast<int>(e)}, in_liquor = undissolved;
    for (std::size_t outlet : outlets) {
      undissolved.values.push_back(100 * ratio(now.at("stream_metal_undissolved", {outlet, e}), view.at("fed", {e})));
      in_liquor.values.push_back(1000 * ratio(now.at("stream_metal_dissolved", {outlet, e}), now.at("stream_liquor_flow", {outlet})));
    }
    undissolved_view.series.push_back(undissolved);
    dissolved_view.series.push_back(in_liquor);
  }
  if (wide(dissolved_view.series)) {
    dissolved_view.y.logarithmic = true;
    dissolved_view.y.title += ", logarithmic";
    drop_traces(dissolved_view.series, 1e-4);
  }
  left.kind = dissolved.kind = ChartKind::lines;
  left.views = {undissolved_view};
  dissolved.views = {dissolved_view};
  page.chart(left);
  page.chart(dissolved);

  PageChart chemistry = stage_chart(view, "ph-by-stage", "pH and free ligands, by stage", "pH (left) and what is left of each ligand neither bound nor protonated (right).");
  ChartView both{"", {"pH", "", false, true}, ChartAxis{"free ligand, mol/kg", "mol/kg"}, {}};
  ChartSeries ph{"pH", {}};
  for (std::size_t u = 0; u < view.size("unit"); ++u) ph.values.push_back(now.at("ph", {u}));
  both.series.push_back(ph);
  for (std::size_t s : free_ligands(view)) {
    ChartSeries free{view.labels("species")[s] + " free", {}, -1, "", false, true};
    for (std::size_t u = 0; u < view.size("unit"); ++u) free.values.push_back(now.at("molality", {u, s}));
    if (*std::max_element(free.values.begin(), free.values.end()) > 1e-6) both.series.push_back(free);
  }
  if (both.series.size() == 1) both.right.reset();
  chemistry.views = {both};
  page.chart(chemistry);
}

void add_history(PageBuilder& page, const ResultView& view, TableShelf& shelf) {
  if (view.size("time") < 2) return;
  page.section("history", "Through time");
  const std::vector<std::size_t> rows = picked(view.size("time"), most_rows);
  const auto along = [&](const std::function<double(std::size_t)>& value) {
    std::vector<double> out;
    for (std::size_t row : rows) out.push_back(value(row));
    return out;
  };
  PageChart recovery = time_chart(view, rows, "recovery-through-time", "Recovery through time", "Whole lines: recovery at the moment. Dashed lines: all recovered over all fed since the start.");
  ChartView shares{"", {"% of metal fed", "%", false, false, 0.0, {}}, {}, {}};
  for (std::size_t e = 0; e < view.size("element"); ++e) {
    const std::string& metal = view.labels("element")[e];
    shares.series.push_back({metal + " now", along([&](std::size_t t) { return 100 * view.at("recovery", {t, e}); }), static_cast<int>(e)});
    shares.series.push_back({metal + " to date", along([&](std::size_t t) { return 100 * view.at("recovery_to_date", {t, e}); }), static_cast<int>(e), "", true});
  }
  recovery.views = {shares};
  page.chart(recovery);

  PageChart ph = time_chart(view, rows, "ph-through-time", "pH of each vessel through time", "A vessel whose pH still moves at the end is not at rest yet.");
  ChartView acidity{"", {"pH", "", false, true}, {}, {}};
  for (std::size_t u = 0; u < view.size("unit"); ++u)
    acidity.series.push_back({view.labels("unit")[u], along([&](std::size_t t) { return view.at("ph", {t, u}); }), static_cast<int>(u)});
  ph.views = {acidity};
  page.chart(ph);

  PageChart families = time_chart(view, picked(view.size("time"), 60), "families-through-time", "Dissolved metal by family of complexes through time",
                                  "All dissolved forms of a metal in a vessel, stacked by the family of its complexes.");
  families.kind = ChartKind::areas;
  families.choose = "Metal and vessel";
  const std::vector<std::size_t> few = picked(view.size("time"), 60);
  for (std::size_t e = 0; e < view.size("element"); ++e)
    for (std::size_t u = 0; u < view.size("unit"); ++u) {
      ChartView one{view.labels("element")[e] + " in " + view.labels("unit")[u], {"mol per m3 of liquor", "mol/m3", false, false, 0.0, {}}, {}, {}};
      double highest = 0;
      for (std::size_t f = 0; f < view.size("family"); ++f) {
        ChartSeries series{view.labels("family")[f], {}, static_cast<int>(f)};
        for (std::size_t t : few) series.values.push_back(std::max(0.0, view.at("family_in_unit", {t, u, e, f})));
        highest = std::max(highest, *std::max_element(series.values.begin(), series.values.end()));
        one.series.push_back(std::move(series));
      }
      std::erase_if(one.series, [&](const ChartSeries& series) { return *std::max_element(series.values.begin(), series.values.end()) < 1e-4 * highest; });
      if (highest > 0 && !one.series.empty()) families.views.push_back(std::move(one));
    }
  page.chart(families);
  shelf.take(page, "history", true);
}

}  // namespace leat
