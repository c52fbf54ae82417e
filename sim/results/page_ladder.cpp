#include <algorithm>
#include <cmath>
#include <fmt/format.h>

#include "sim/results/page_sections.hpp"
#include "sim/results/page_values.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

// The rungs of the series that one picture shows, and what stands along x.
struct Rungs {
  struct Series {
    std::string name;
    std::vector<std::size_t> rungs;
    std::vector<double> at;   // along x, one a rung
  };
  std::vector<Series> series;
  bool quantities = true;     // stepped values are numbers; else their texts stand along x
  ChartAxis x;
  std::string id, of;         // of one series apart from the others: what its charts' ids and titles end with
};

std::vector<std::string> typed_of(const ResultView& view, const Rungs::Series& series) {
  std::vector<std::string> typed;
  for (std::size_t r : series.rungs) typed.push_back(view.text("value_as_typed", r));
  return typed;
}

std::string path_of(const ResultView& view, const std::string& series) {
  const std::vector<std::string>& names = view.labels("series_name");
  const auto found = std::find(names.begin(), names.end(), series);
  return found == names.end() ? "" : view.text("stepped_path", static_cast<std::size_t>(found - names.begin()));
}

bool starts_as_number(const std::string& typed) {
  const std::size_t first = typed.find_first_not_of(" +-.");
  return first != std::string::npos && typed[first] >= '0' && typed[first] <= '9';
}

// A series with an axis of its own: numbers where all are typed in one unit, else words.
Rungs alone(const ResultView& view, Rungs::Series series, std::size_t place) {
  Rungs rungs;
  rungs.id = fmt::format("-{}", place + 1);
  rungs.of = ": " + series.name;
  const std::string path = path_of(view, series.name);
  const auto numbers = typed_numbers(typed_of(view, series));
  rungs.quantities = numbers.has_value();
  rungs.x.title = path.empty() ? "stepped input" : path;
  if (numbers) {
    series.at = numbers->values;
    rungs.x.logarithmic = roughly_geometric(numbers->values);
    rungs.x.unit = numbers->unit;
    rungs.x.title += (numbers->unit.empty() ? "" : ", " + numbers->unit) + (rungs.x.logarithmic ? ", logarithmic" : "");
  }
  rungs.series = {std::move(series)};
  return rungs;
}

// Whether the series can share an axis: all numbers of one kind, or all the same words for the same input.
bool share_axis(const ResultView& view, const std::vector<Rungs::Series>& series, bool quantities) {
  if (series.size() < 2) return true;
  if (view.attribute("leat_stepped_units") == "mixed") return false;
  if (quantities) return true;
  return std::all_of(series.begin(), series.end(), [&](const Rungs::Series& one) {
    return path_of(view, one.name) == path_of(view, series.front().name) && typed_of(view, one) == typed_of(view, series.front());
  });
}

// All series in one picture, or each in its own where they step different things.
std::vector<Rungs> pictures_of(const ResultView& view) {
  Rungs rungs;
  for (std::size_t r = 0; r < view.size("rung"); ++r) {
    const std::string name = view.text("series", r);
    if (rungs.series.empty() || rungs.series.back().name != name) rungs.series.push_back({name, {}, {}});
    rungs.series.back().rungs.push_back(r);
    rungs.series.back().at.push_back(view.at("stepped", {r}));
    if (!starts_as_number(view.text("value_as_typed", r))) rungs.quantities = false;
  }
  if (!share_axis(view, rungs.series, rungs.quantities)) {
    std::vector<Rungs> apart;
    for (std::size_t k = 0; k < rungs.series.size(); ++k) apart.push_back(alone(view, rungs.series[k], k));
    return apart;
  }
  std::string unit = view.attribute("leat_stepped_units");
  if (unit == "1" || unit == "mixed") unit.clear();
  std::string path = view.attribute("leat_stepped_path");
  for (std::size_t k = 0; k < view.size("series_name"); ++k)
    if (view.text("stepped_path", k) != view.attribute("leat_stepped_path")) path = "stepped input";  // each series has its own
  rungs.x = {path + (unit.empty() ? "" : ", " + unit), unit, view.attribute("leat_scale") == "logarithmic" && rungs.quantities};
  if (rungs.x.logarithmic) rungs.x.title += ", logarithmic";
  return {rungs};
}

class LadderCharts {
 public:
  LadderCharts(PageBuilder& page, const ResultView& view, Rungs rungs) : page_(page), view_(view), rungs_(std::move(rungs)) {}

  PageChart start(const std::string& id, const std::string& title, std::string reading) const {
    PageChart chart;
    chart.id = id + rungs_.id;
    chart.title = title + rungs_.of;
    chart.reading = std::move(reading);
    chart.x = rungs_.x;
    if (!rungs_.quantities)
      for (const Rungs::Series& one : rungs_.series)
        if (one.rungs.size() > chart.labels.size()) chart.labels = typed_of(view_, one);
    return chart;
  }
  // One line over the rungs of a series; rungs without a value are left out.
  ChartSeries line(const Rungs::Series& of, std::string name, int look, const std::function<double(std::size_t)>& value) const {
    ChartSeries made{std::move(name), {}, look};
    if (!rungs_.quantities) made.stroke = "none";  // no way leads from word to word
    for (std::size_t k = 0; k < of.rungs.size(); ++k) {
      const double here = value(of.rungs[k]);
      if (!rungs_.quantities)
        made.values.push_back(here);
      else if (std::isfinite(here)) {
        made.at.push_back(of.at[k]);
        made.values.push_back(here);
      }
    }
    return made;
  }
  // All series of the ladder in one picture.
  ChartView side_by_side(std::string name, const ChartAxis& y, const std::function<double(std::size_t)>& value) const {
    ChartView made{std::move(name), y, {}, {}};
    for (std::size_t k = 0; k < rungs_.series.size(); ++k) {
      ChartSeries one = line(rungs_.series[k], rungs_.series[k].name.empty() ? y.title : rungs_.series[k].name, static_cast<int>(k), value);
      if (std::any_of(one.values.begin(), one.values.end(), [](double v) { return std::isfinite(v); })) made.series.push_back(std::move(one));
    }
    return made;
  }
  static void keep(PageChart& chart, ChartView view) {
    for (const ChartSeries& one : view.series)
      if (std::any_of(one.values.begin(), one.values.end(), [](double v) { return v != 0 && std::isfinite(v); })) {
        chart.views.push_back(std::move(view));
        return;
      }
  }
  std::string name_of(const Rungs::Series& series, const std::string& what) const {
    return rungs_.series.size() > 1 ? what + ", " + series.name : what;
  }

  void recovery() {
    PageChart chart =
        start("recovery-by-step", "Recovery against the stepped input",
              "Metal in the pregnant liquor over metal fed, at steady state; where a curve bends down, more of the input no longer pays.");
    chart.choose = "Metal";
    for (std::size_t e = 0; e < view_.size("element"); ++e)
      keep(chart, side_by_side(view_.labels("element")[e], {"% of metal fed", "%", false, false, 0.0, {}}, [&](std::size_t r) {
             return 100 * view_.at("recovery", {r, e});
           }));
    if (rungs_.series.size() == 1 && chart.views.size() > 1) join(chart);
    if (view_.has("recovery")) page_.chart(chart);
  }
  void dissolved() {
    PageChart chart = start("dissolved-by-step", "Dissolved metal against the stepped input",
                            "All dissolved forms of a metal together; a step where a solid is at its limit shows as a bend.");
    chart.choose = "Metal";
    for (std::size_t c = 0; c < view_.size("component"); ++c) {
      if (!is_metal(view_, c) && !holds_shares(c)) continue;
      keep(chart, side_by_side(view_.labels("component")[c], {"mol/L", "mol/L", false, false, {}, {}}, [&](std::size_t r) {
             return view_.at("dissolved", {r, c}) / 1000;
           }));
    }
    if (rungs_.series.size() == 1 && chart.views.size() > 1) join(chart);
    for (ChartView& one : chart.views) spread(one);
    if (view_.has("dissolved")) page_.chart(chart);
  }
  void distribution() {
    constexpr double least = 0.001;
    constexpr std::size_t most = 8;
    PageChart chart = start("distribution-by-step", "Distribution of each metal among its complexes",
                            "All dissolved forms of a metal are 100 %: which complex carries it as the input is stepped.");
    chart.kind = rungs_.quantities ? ChartKind::areas : ChartKind::bars;
    chart.choose = "Metal";
    for (std::size_t c = 0; c < view_.size("component"); ++c)
      for (const Rungs::Series& of : rungs_.series) {
        ChartView made{name_of(of, view_.labels("component")[c]), {"share of the dissolved metal, %", "%", false, false, 0.0, 100.0}, {}, {}};
        std::vector<std::pair<double, std::size_t>> ranked;
        for (std::size_t s = 0; s < view_.size("species"); ++s) {
          double largest = 0;
          for (std::size_t r : of.rungs)
            if (const double share = view_.at("share", {r, c, s}); share > largest) largest = share;
          if (largest >= least) ranked.emplace_back(-largest, s);
        }
        if (ranked.empty()) continue;
        std::sort(ranked.begin(), ranked.end());
        if (ranked.size() > most) ranked.resize(most - 1);
        const auto of_all = [&](std::size_t r) {
          double sum = 0;
          for (const auto& [share, s] : ranked) sum += view_.at("share", {r, c, s});
          return sum;
        };
        for (const auto& [largest, s] : ranked)
          made.series.push_back(line(of, view_.labels("species")[s], -1, [&, s = s](std::size_t r) { return 100 * view_.at("share", {r, c, s}); }));
        ChartSeries rest = line(of, "all others", -1, [&](std::size_t r) { return 100 * std::max(0.0, 1 - of_all(r)); });
        rest.rest = "rest-lost";
        if (std::any_of(rest.values.begin(), rest.values.end(), [](double value) { return value > 0.1; })) made.series.push_back(std::move(rest));
        chart.views.push_back(std::move(made));
      }
    page_.chart(chart);
  }
  void state() {
    PageChart ph = start("ph-by-step", "pH against the stepped input", "pH of the liquor.");
    keep(ph, side_by_side("", {"pH", ""}, [&](std::size_t r) { return view_.at("ph", {r}); }));
    for (ChartView& one : ph.views) one.y = ph_axis(one.series);
    page_.chart(ph);
    PageChart solids = start("solids-by-step", "Solids formed against the stepped input",
                             "Solids in equilibrium with the liquor; where one vanishes the liquor is no longer saturated with it.");
    solids.choose = "Solid";
    for (std::size_t m = 0; m < view_.size("mineral"); ++m)
      keep(solids, side_by_side(view_.labels("mineral")[m], {"mol per m3 of liquor", "mol/m3", false, false, 0.0, {}}, [&](std::size_t r) {
             return view_.at("formed", {r, m});
           }));
    page_.chart(solids);
  }
  void reagents() {
    PageChart chart = start("reagents-by-step", "Use of reagents against the stepped input", "Reagent fed per mass of dry solids fed.");
    chart.choose = "Reagent";
    for (std::size_t s = 0; s < view_.size("stream"); ++s)
      keep(chart, side_by_side(view_.labels("stream")[s], {"kg per t of solids", "kg/t", false, false, 0.0, {}}, [&](std::size_t r) {
             return 1000 * view_.at("reagent_consumption", {r, s});
           }));
    if (view_.has("reagent_consumption")) page_.chart(chart);
  }

 private:
  bool holds_shares(std::size_t component) const {
    for (std::size_t r = 0; r < view_.size("rung"); ++r)
      for (std::size_t s = 0; s < view_.size("species"); ++s)
        if (view_.at("share", {r, component, s}) > 0) return true;
    return false;
  }
  // A single series: its metals as lines of one picture instead of a choice.
  static void join(PageChart& chart) {
    ChartView all = chart.views.front();
    all.series.clear();
    for (const ChartView& one : chart.views)
      for (ChartSeries series : one.series) {
        series.name = one.name;
        series.look = static_cast<int>(all.series.size());
        all.series.push_back(std::move(series));
      }
    all.name.clear();
    chart.views = {all};
  }
  // Over more than two decades on a logarithmic axis.
  static void spread(ChartView& view) {
    double low = INFINITY, high = 0;
    for (const ChartSeries& one : view.series)
      for (double value : one.values)
        if (value > 0) low = std::min(low, value), high = std::max(high, value);
    if (!(high > 100 * low)) {
      view.y.min = 0;
      return;
    }
    view.y.logarithmic = true;
    view.y.title += ", logarithmic";
    for (ChartSeries& one : view.series)
      for (double& value : one.values)
        if (!(value > 0)) value = std::nan("");
  }

  PageBuilder& page_;
  const ResultView& view_;
  Rungs rungs_;
};

}  // namespace

void add_ladder(PageBuilder& page, const ResultView& view) {
  TableShelf shelf(tables_of(view.results()));
  std::vector<LadderCharts> pictures;
  for (const Rungs& one : pictures_of(view)) pictures.emplace_back(page, view, one);
  const auto draw = [&](void (LadderCharts::*chart)()) {
    if (pictures.size() > 1) page.html("<div class=\"multiples\">\n");
    for (LadderCharts& one : pictures) (one.*chart)();
    if (pictures.size() > 1) page.html("</div>\n");
  };
  page.section("answer", "The answer");
  const std::size_t rungs = view.size("rung");
  std::size_t solved = 0;
  for (std::size_t r = 0; r < rungs; ++r) solved += view.text("status", r) == "solved" ? 1 : 0;
  page.paragraph(solved == rungs ? fmt::format("All {} rungs are solved.", rungs)
                                 : fmt::format("{} of {} rungs are solved; why the others are not stands below.", solved, rungs));
  add_cautions(page, view);
  draw(&LadderCharts::recovery);
  draw(&LadderCharts::dissolved);
  if (const std::string words = closure_words(view); !words.empty()) page.paragraph(words);
  if (shelf.has("failures")) {
    page.heading("Rungs that are not there");
    shelf.take(page, "failures", true);
  }
  page.section("distribution", "Who holds the metals");
  draw(&LadderCharts::distribution);
  shelf.take(page, "distribution", true);
  page.section("liquor", "Liquor, solids, reagents");
  draw(&LadderCharts::state);
  draw(&LadderCharts::reagents);
  page.section("rungs", "Rung by rung");
  shelf.take(page, "ladder", rungs > 30);
  add_ending(page, view, shelf);
}

}  // namespace leat
