#include <algorithm>
#include <cmath>
#include <fmt/format.h>

#include "sim/results/page_sections.hpp"

namespace leat {
namespace {

PageChart step_chart(const ResultView& view, std::string id, std::string title, std::string reading) {
  PageChart chart;
  chart.id = std::move(id);
  chart.title = std::move(title);
  chart.reading = std::move(reading);
  chart.x.title = "step";
  for (std::size_t k = 0; k < view.size("step"); ++k) {
    std::string name = view.text("step_name", k);
    if (name.empty()) name = "step";
    // Labels of an axis stand once each.
    if (std::find(chart.labels.begin(), chart.labels.end(), name) != chart.labels.end()) name += fmt::format(" ({})", k + 1);
    chart.labels.push_back(std::move(name));
  }
  return chart;
}

std::vector<double> by_step(const ResultView& view, const std::function<double(std::size_t)>& value) {
  std::vector<double> out;
  for (std::size_t k = 0; k < view.size("step"); ++k) out.push_back(value(k));
  return out;
}

void add_state_charts(PageBuilder& page, const ResultView& view) {
  PageChart ph =
      step_chart(view, "ph-by-step", "pH and liquor, step by step", "pH (left) and the volume of the liquor (right) at the end of each step.");
  ph.views = {{"",
               {},
               ChartAxis{"liquor, L", "L", false, false, 0.0, {}},
               {{"pH", by_step(view, [&](std::size_t k) { return view.at("ph", {k}); })},
                {"liquor", by_step(view, [&](std::size_t k) { return 1000 * view.at("liquor_volume", {k}); }), -1, "", "", true}}}};
  ph.views.front().y = ph_axis(ph.views.front().series);
  page.chart(ph);

  const bool weighed = view.has("mineral_mass");
  PageChart solids = step_chart(view, "solids-by-step", "Solids, step by step", "Solids present at the end of each step.");
  solids.kind = ChartKind::bars;
  ChartView amounts{"", {weighed ? "g" : "mol", weighed ? "g" : "mol", false, false, 0.0, {}}, {}, {}};
  for (std::size_t m = 0; m < view.size("mineral"); ++m) {
    ChartSeries one{view.labels("mineral")[m], by_step(view, [&](std::size_t k) {
                      return view.at("formed", {k, m}) * (weighed ? 1000 * view.at("mineral_mass", {m}) : 1);
                    })};
    if (std::any_of(one.values.begin(), one.values.end(), [](double value) { return value > 0; })) amounts.series.push_back(std::move(one));
  }
  solids.views = {amounts};
  page.chart(solids);
}

void add_dissolved(PageBuilder& page, const ResultView& view) {
  PageChart chart =
      step_chart(view, "dissolved-by-step", "Dissolved, all forms together",
                 "Concentration in the liquor at the end of each step, on a logarithmic axis; a metal that falls has come down as a solid.");
  ChartView one{"", {"mol/L, logarithmic", "mol/L", true}, {}, {}};
  for (std::size_t c = 0; c < view.size("component"); ++c) {
    if (!of_interest(view, c)) continue;
    ChartSeries series{view.labels("component")[c], by_step(view, [&](std::size_t k) {
                         const double concentration = view.at("dissolved", {k, c}) / (1000 * view.at("liquor_volume", {k}));
                         return concentration > 1e-12 ? concentration : std::nan("");
                       })};
    one.series.push_back(std::move(series));
  }
  chart.views = {one};
  page.chart(chart);
}

void add_saturation(PageBuilder& page, const ResultView& view) {
  PageChart chart = step_chart(view, "saturation-by-step", "Saturation index, step by step",
                               "0: saturated; above 0 the solid could form, below 0 it would dissolve. Indices below -10 are left out.");
  ChartView one{"", {"log10 of ion activity product over constant", "", false, true}, {}, {}};
  for (std::size_t m = 0; m < view.size("mineral"); ++m) {
    ChartSeries series{view.labels("mineral")[m], by_step(view, [&](std::size_t k) {
                         const double index = view.at("saturation_index", {k, m});
                         return index > -10 ? index : std::nan("");
                       })};
    if (std::any_of(series.values.begin(), series.values.end(), [](double value) { return std::isfinite(value); }))
      one.series.push_back(std::move(series));
  }
  chart.views = {one};
  page.chart(chart);
}

}  // namespace

void add_beaker(PageBuilder& page, const ResultView& view) {
  TableShelf shelf(tables_of(view.results()));
  page.section("answer", "The answer, step by step");
  add_cautions(page, view);
  shelf.take(page, "steps");
  add_state_charts(page, view);
  if (const std::string words = closure_words(view); !words.empty()) page.paragraph(words);

  page.section("dissolved", "Dissolved");
  add_dissolved(page, view);
  shelf.take(page, "dissolved");

  page.section("holders", "Who holds what");
  PageChart chart =
      step_chart(view, "who-holds-what", "How the species share each dissolved total", "All dissolved forms together are 100 % in each step.");
  chart.kind = ChartKind::bars;
  chart.choose = "Of";
  chart.views = sharing_views(
      view, view.size("step"),
      [&](std::size_t step, std::size_t species) {
        return view.at("molality", {step, species});
      },
      [&](std::size_t c) { return of_interest(view, c); });
  // Metals first.
  std::stable_partition(chart.views.begin(), chart.views.end(), [&](const ChartView& one) {
    const auto& names = view.labels("component");
    return is_metal(view, static_cast<std::size_t>(std::find(names.begin(), names.end(), one.name) - names.begin()));
  });
  page.chart(chart);
  shelf.take(page, "holders", true);

  if (view.size("mineral") > 0) {
    page.section("saturation", "Saturation");
    add_saturation(page, view);
    shelf.take(page, "saturation");
  }
  add_ending(page, view, shelf);
}

}  // namespace leat
