#include <algorithm>
#include <cmath>
#include <fmt/format.h>

#include "sim/results/page_sections.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

double percent(double share) { return 100 * share; }

// A metal's recovery in large figures, before all else.
void add_heads(PageBuilder& page, const ResultView& view, const Moment& now) {
  std::string html = "<dl class=\"heads\">\n";
  for (std::size_t e = 0; e < view.size("element"); ++e) {
    const double recovery = percent(now.at("recovery", {e})), extraction = percent(now.at("extraction", {e}));
    html += fmt::format("<div><dt>{} recovered</dt><dd data-recovery=\"{}\">{} %<small>{} % extracted</small></dd></div>\n",
                        escaped(view.labels("element")[e]), escaped(view.labels("element")[e]), significant(recovery), significant(extraction));
  }
  page.html(html + "</dl>\n");
}

// Of the metal fed: recovered by family, dissolved but leaving elsewhere, formed and leaving, left undissolved.
void add_recovery_chart(PageBuilder& page, const ResultView& view, const Moment& now) {
  PageChart chart;
  chart.id = "where-metal-goes";
  chart.title = "Where each metal goes, " + now.words();
  chart.reading =
      "Each bar is all of a metal that the solids bring: what reaches " + view.attribute("leat_pregnant_liquor") +
      " by family of complexes, then what dissolves and leaves elsewhere, what comes down and leaves as formed solids, and what never dissolves.";
  chart.kind = ChartKind::bars;
  chart.across = true;
  chart.x.title = "metal";
  chart.labels = view.labels("element");
  ChartView parts{"", {"% of metal fed", "%", false, false, 0.0, {}}, {}, {}};
  const std::size_t metals = view.size("element");
  for (std::size_t f = 0; f < view.size("family"); ++f) {
    ChartSeries series{"as " + view.labels("family")[f], {}, static_cast<int>(f)};
    for (std::size_t e = 0; e < metals; ++e) series.values.push_back(percent(now.at("recovery_by_family", {e, f})));
    if (std::any_of(series.values.begin(), series.values.end(), [](double value) { return value > 0.01; })) parts.series.push_back(series);
  }
  ChartSeries lost{"dissolved, leaving elsewhere", {}, -1, "rest-lost"}, formed{"formed solids, leaving", {}, -1, "rest-formed"},
      left{"never dissolved", {}, -1, "rest-left"};
  for (std::size_t e = 0; e < metals; ++e) {
    const double extraction = now.at("extraction", {e}), down = now.at("formed_leaving", {e});
    lost.values.push_back(percent(std::max(0.0, extraction - now.at("recovery", {e}) - down)));
    formed.values.push_back(percent(down));
    left.values.push_back(percent(std::max(0.0, 1 - extraction)));
  }
  for (ChartSeries* one : {&lost, &formed, &left})
    if (std::any_of(one->values.begin(), one->values.end(), [](double value) { return value > 0.01; })) parts.series.push_back(*one);
  double longest = 0;  // of the bars; more than 100 only while what was held in vessels comes out
  for (std::size_t e = 0; e < metals; ++e) {
    double sum = 0;
    for (const ChartSeries& one : parts.series) sum += std::isfinite(one.values[e]) ? one.values[e] : 0;
    longest = std::max(longest, sum);
  }
  if (longest < 100.5) parts.y.max = 100;
  chart.views.push_back(parts);
  page.chart(chart);
}

void add_answer(PageBuilder& page, const ResultView& view, const Moment& now, TableShelf& shelf) {
  page.section("answer", "The answer");
  if (view.size("element") > 0) {
    page.paragraph("Recovery into " + view.attribute("leat_pregnant_liquor") + ", " + now.words() + ".");
    add_heads(page, view, now);
  }
  add_cautions(page, view);
  add_recovery_chart(page, view, now);
  shelf.take(page, "recovery");
  shelf.take(page, "metals");
  if (const std::string words = closure_words(view); !words.empty()) page.paragraph(words);
}

void add_holders(PageBuilder& page, const ResultView& view, const Moment& now) {
  const auto amount = [&](std::size_t unit, std::size_t species) { return now.at("molality", {unit, species}); };
  PageChart ligands;
  ligands.id = "who-holds-the-ligand";
  ligands.title = "Who holds the ligand, stage by stage";
  ligands.reading =
      "All of a ligand dissolved in a vessel is 100 %: free, protonated, or bound to a metal; what the metals bind is not there for the next one.";
  ligands.kind = ChartKind::bars;
  ligands.x.title = "vessel";
  ligands.choose = "Ligand";
  ligands.labels = view.labels("unit");
  PageChart metals = ligands;
  metals.id = "who-holds-the-metal";
  metals.title = "Which complexes hold each metal, stage by stage";
  metals.reading = "All of a metal dissolved in a vessel is 100 %.";
  metals.choose = "Metal";
  const std::size_t vessels = view.size("unit");
  ligands.views = sharing_views(
      view, vessels, amount, [&](std::size_t c) { return of_interest(view, c) && !is_metal(view, c) && !view.text("component_family", c).empty(); });
  metals.views = sharing_views(view, vessels, amount, [&](std::size_t c) { return is_metal(view, c); });
  if (ligands.views.empty() && metals.views.empty()) return;
  page.section("holders", "Who holds what");
  page.chart(ligands);
  page.chart(metals);
}

}  // namespace

void add_run(PageBuilder& page, const ResultView& view) {
  const Moment now(view);
  TableShelf shelf(tables_of(view.results()));
  add_answer(page, view, now, shelf);
  add_flow(page, view, now);
  if (shelf.has("streams")) {
    page.section("streams", "Streams");
    shelf.take(page, "streams");
  }
  if (view.size("unit") > 0) {
    page.section("stages", "Stages");
    shelf.take(page, "stages");
    add_stage_charts(page, view, now);
  }
  add_history(page, view, shelf);
  add_holders(page, view, now);
  if (shelf.has("reagents")) {
    page.section("reagents", "Reagents");
    shelf.take(page, "reagents");
  }
  add_ending(page, view, shelf);
}

}  // namespace leat
