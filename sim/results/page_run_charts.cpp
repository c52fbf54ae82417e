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

// A vessel without fed minerals has no place on the way from stage to stage.
void drop_empty_vessels(std::vector<ChartSeries>& series) {
  if (series.empty()) return;
  for (std::size_t u = 0; u < series.front().values.size(); ++u) {
    const bool empty = std::all_of(series.begin(), series.end(), [&](const ChartSeries& one) { return !(one.values[u] > 1e-6); });
    for (ChartSeries& one : series)
      if (empty) one.values[u] = std::nan("");
  }
}

// The vessel whose liquor becomes the pregnant liquor, found upstream of it; the first where there is none.
std::size_t vessel_before_pregnant(const ResultView& view) {
  const std::vector<std::string>&streams = view.labels("stream"), &vessels = view.labels("unit");
  std::string at = view.attribute("leat_pregnant_liquor");
  for (std::size_t steps = 0; steps < streams.size(); ++steps) {
    const auto stream = std::find(streams.begin(), streams.end(), at);
    if (stream == streams.end()) break;
    const std::string source = view.text("stream_from", static_cast<std::size_t>(stream - streams.begin()));
    const auto vessel = std::find(vessels.begin(), vessels.end(), source);
    if (vessel != vessels.end()) return static_cast<std::size_t>(vessel - vessels.begin());
    const TextTable* to = find_texts(view.results(), "stream_to");
    if (!to || source.empty()) break;
    const auto inlet = std::find(to->values.begin(), to->values.end(), source);
    if (inlet == to->values.end()) break;
    at = streams[static_cast<std::size_t>(inlet - to->values.begin())];
  }
  return 0;
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
                               "Of each metal fed, what is still in fed minerals in the pulp that leaves the vessel; a stage that hardly lowers it "
                               "is not earning its volume.");
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
  drop_empty_vessels(undissolved_view.series);
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

  PageChart chemistry = stage_chart(view, "ph-by-stage", "pH and free ligands, by stage",
                                    "pH (left) and what is left of each ligand neither bound nor protonated (right).");
  ChartView both{"", {}, ChartAxis{"free ligand, mol/kg", "mol/kg"}, {}};
  ChartSeries ph{"pH", {}};
  for (std::size_t u = 0; u < view.size("unit"); ++u) ph.values.push_back(now.at("ph", {u}));
  both.series.push_back(ph);
  for (std::size_t s : free_ligands(view)) {
    ChartSeries free{view.labels("species")[s] + " free", {}, -1, "", "", true};
    for (std::size_t u = 0; u < view.size("unit"); ++u) free.values.push_back(now.at("molality", {u, s}));
    if (*std::max_element(free.values.begin(), free.values.end()) > 1e-6) both.series.push_back(free);
  }
  if (both.series.size() == 1) both.right.reset();
  both.y = ph_axis(both.series);
  chemistry.views = {both};
  page.chart(chemistry);
}

namespace {

void add_families(PageBuilder& page, const ResultView& view) {
  constexpr std::size_t moments = 60;
  const std::vector<std::size_t> few = picked(view.size("time"), moments);
  PageChart families = time_chart(view, few, "families-through-time", "Dissolved metal by family of complexes through time",
                                  "All dissolved forms of a metal in a vessel, stacked by the family of its complexes.");
  families.kind = ChartKind::areas;
  families.choose = "Metal and vessel";
  std::vector<std::size_t> vessels = {vessel_before_pregnant(view)};
  for (std::size_t u = 0; u < view.size("unit"); ++u)
    if (u != vessels.front()) vessels.push_back(u);
  for (std::size_t u : vessels)
    for (std::size_t e = 0; e < view.size("element"); ++e) {
      ChartView one{view.labels("element")[e] + " in " + view.labels("unit")[u], {"mol per m3 of liquor", "mol/m3", false, false, 0.0, {}}, {}, {}};
      double highest = 0;
      for (std::size_t f = 0; f < view.size("family"); ++f) {
        ChartSeries series{view.labels("family")[f], {}, static_cast<int>(f)};
        for (std::size_t t : few) series.values.push_back(std::max(0.0, view.at("family_in_unit", {t, u, e, f})));
        highest = std::max(highest, *std::max_element(series.values.begin(), series.values.end()));
        one.series.push_back(std::move(series));
      }
      std::erase_if(one.series,
                    [&](const ChartSeries& series) { return *std::max_element(series.values.begin(), series.values.end()) < 1e-4 * highest; });
      if (highest > 0 && !one.series.empty()) families.views.push_back(std::move(one));
    }
  page.chart(families);
}

}  // namespace

void add_history(PageBuilder& page, const ResultView& view, TableShelf& shelf) {
  if (view.size("time") < 2) return;
  page.section("history", "Through time");
  const std::vector<std::size_t> rows = picked(view.size("time"), most_rows);
  const auto along = [&](const std::function<double(std::size_t)>& value) {
    std::vector<double> out;
    for (std::size_t row : rows) out.push_back(value(row));
    return out;
  };
  PageChart recovery = time_chart(view, rows, "recovery-through-time", "Recovery through time",
                                  "Whole lines: recovery at the moment. Dashed lines: all recovered over all fed since the start.");
  ChartView shares{"", {"% of metal fed", "%", false, false, 0.0, {}}, {}, {}};
  for (std::size_t e = 0; e < view.size("element"); ++e) {
    const std::string& metal = view.labels("element")[e];
    shares.series.push_back({metal + " now", along([&](std::size_t t) {
                               return 100 * view.at("recovery", {t, e});
                             }),
                             static_cast<int>(e), "", "whole"});
    shares.series.push_back({metal + " to date", along([&](std::size_t t) {
                               return 100 * view.at("recovery_to_date", {t, e});
                             }),
                             static_cast<int>(e), "", "dashed"});
  }
  recovery.views = {shares};
  page.chart(recovery);

  PageChart ph =
      time_chart(view, rows, "ph-through-time", "pH of each vessel through time", "A vessel whose pH still moves at the end is not at rest yet.");
  ChartView acidity;
  for (std::size_t u = 0; u < view.size("unit"); ++u)
    acidity.series.push_back({view.labels("unit")[u], along([&](std::size_t t) { return view.at("ph", {t, u}); }), static_cast<int>(u)});
  acidity.y = ph_axis(acidity.series);
  ph.views = {acidity};
  page.chart(ph);

  add_families(page, view);
  shelf.take(page, "history", true);
}

}  // namespace leat
