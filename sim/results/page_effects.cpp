#include <algorithm>
#include <cmath>
#include <fmt/format.h>
#include <map>

#include "sim/results/page_sections.hpp"
#include "sim/results/page_values.hpp"

namespace leat {
namespace {

// Results of the cases that are done, by the value of one input as typed; values in the order of the campaign.
struct ByValue {
  std::vector<std::string> values;
  std::map<std::string, std::vector<double>> results;
};

ByValue by_value(const CampaignResult& campaign, std::size_t input, std::size_t result) {
  ByValue found;
  for (const CampaignCase& one : campaign.cases) {
    if (one.status != CaseStatus::done || input >= one.inputs.size() || result >= one.watched.size() || !std::isfinite(one.watched[result])) continue;
    std::vector<double>& all = found.results[one.inputs[input]];
    if (all.empty()) found.values.push_back(one.inputs[input]);
    all.push_back(one.watched[result]);
  }
  return found;
}

// The places along x with the results there: by number where the values are numbers, else a word each.
std::vector<std::vector<double>> put_along(PageChart& chart, const ByValue& found) {
  std::vector<std::vector<double>> columns;
  const auto numbers = typed_numbers(found.values);
  if (!numbers) {
    chart.labels = found.values;
    for (const std::string& value : found.values) columns.push_back(found.results.at(value));
    return columns;
  }
  std::map<double, std::vector<double>> sorted;
  for (std::size_t k = 0; k < found.values.size(); ++k) {
    const std::vector<double>& more = found.results.at(found.values[k]);
    std::vector<double>& all = sorted[numbers->values[k]];
    all.insert(all.end(), more.begin(), more.end());
  }
  for (auto& [number, all] : sorted) {
    chart.numbers.push_back(number);
    columns.push_back(std::move(all));
  }
  chart.x.unit = numbers->unit;
  chart.x.title = with_unit(chart.x.title, numbers->unit);
  chart.x.logarithmic = roughly_geometric(chart.numbers);
  if (chart.x.logarithmic) chart.x.title += ", logarithmic";
  return columns;
}

PageChart effect_chart(const CampaignResult& campaign, std::size_t input, std::size_t by, const ByValue& found) {
  PageChart chart;
  chart.id = fmt::format("effect-{}", input + 1);
  chart.title = campaign.paths[input];
  chart.reading = "Mean, smallest and largest " + campaign.rank_by + " of the cases with each value.";
  chart.kind = ChartKind::spans;
  chart.height = 240;
  chart.x.title = campaign.paths[input];
  const std::string unit = campaign.watch_units[by] == "1" ? "" : campaign.watch_units[by];
  ChartView view{"", {with_unit(campaign.rank_by, unit), unit, false, true}, {}, {{"smallest", {}}, {"mean", {}}, {"largest", {}}}};
  for (const std::vector<double>& all : put_along(chart, found)) {
    double sum = 0;
    for (double one : all) sum += one;
    view.series[0].values.push_back(*std::min_element(all.begin(), all.end()));
    view.series[1].values.push_back(sum / static_cast<double>(all.size()));
    view.series[2].values.push_back(*std::max_element(all.begin(), all.end()));
  }
  chart.views = {view};
  return chart;
}

}  // namespace

void add_effects(PageBuilder& page, const CampaignResult& campaign) {
  constexpr std::size_t most_values = 40;
  const std::size_t by = rank_column(campaign);
  if (by >= campaign.watch.size()) return;
  std::vector<PageChart> charts;
  for (std::size_t input = 0; input < campaign.paths.size(); ++input) {
    const ByValue found = by_value(campaign, input, by);
    if (found.values.size() < 2 || (found.values.size() > most_values && !typed_numbers(found.values))) continue;
    charts.push_back(effect_chart(campaign, input, by, found));
    if (std::max(charts.back().numbers.size(), charts.back().labels.size()) < 2) charts.pop_back();
  }
  if (charts.empty()) return;
  page.section("effects", "What each input does");
  page.paragraph(
      "Mean and span of the cases that have each value. In a full grid a mean that moves is this input's own effect; where inputs were varied "
      "together it is not.");
  const auto waiting = std::count_if(campaign.cases.begin(), campaign.cases.end(), [](const CampaignCase& one) { return one.status == CaseStatus::waiting; });
  if (waiting > 0) page.paragraph(fmt::format("{} of {} cases still wait and are not counted here.", waiting, campaign.cases.size()));
  page.html("<div class=\"multiples\">\n");
  for (const PageChart& chart : charts) page.chart(chart);
  page.html("</div>\n");
}

}  // namespace leat
