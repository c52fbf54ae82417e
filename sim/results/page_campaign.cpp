#include <algorithm>
#include <cmath>
#include <fmt/format.h>
#include <map>

#include "sim/results/page.hpp"
#include "sim/results/page_sections.hpp"

namespace leat {

std::string with_unit(const std::string& name, const std::string& unit) { return unit.empty() || unit == "1" ? name : name + ", " + unit; }

std::size_t rank_column(const CampaignResult& campaign) {
  return static_cast<std::size_t>(std::find(campaign.watch.begin(), campaign.watch.end(), campaign.rank_by) - campaign.watch.begin());
}

namespace {

std::string said(CaseStatus status) {
  std::string word = to_string(status);
  std::replace(word.begin(), word.end(), '_', ' ');
  return word;
}

void add_counts(PageBuilder& page, const CampaignResult& campaign, const std::vector<std::size_t>& order) {
  std::map<CaseStatus, int> counts;
  for (const CampaignCase& one : campaign.cases) ++counts[one.status];
  std::string html = fmt::format("<dl class=\"heads\">\n<div><dt>cases</dt><dd>{}</dd></div>\n", campaign.cases.size());
  for (const auto& [status, count] : counts)
    html += fmt::format("<div><dt>{}</dt><dd data-status=\"{}\">{}</dd></div>\n", escaped(said(status)), escaped(to_string(status)), count);
  page.html(html + "</dl>\n");
  if (order.empty()) {
    page.paragraph("No case is done.");
    return;
  }
  const CampaignCase& best = campaign.cases[order.front()];
  std::string inputs;
  for (std::size_t k = 0; k < campaign.paths.size() && k < best.inputs.size(); ++k)
    inputs += (inputs.empty() ? "" : ", ") + campaign.paths[k] + " " + best.inputs[k];
  const std::size_t by = rank_column(campaign);
  if (by < campaign.watch.size() && by < best.watched.size() && std::isfinite(best.watched[by]))
    page.paragraph(fmt::format("Case {} leads with the {} {}: {}{}.", best.number, campaign.largest_first ? "largest" : "smallest", campaign.rank_by,
                               significant(best.watched[by]),
                               campaign.watch_units[by] == "1" || campaign.watch_units[by].empty() ? "" : " " + campaign.watch_units[by]) +
                   (inputs.empty() ? "" : " It has " + inputs + "."));
}

void add_ranking(PageBuilder& page, const CampaignResult& campaign, const std::vector<std::size_t>& order) {
  if (order.empty()) return;
  page.section("ranking", "Ranking");
  ResultTable table{"ranking",
                    fmt::format("Cases by {}, {} first", campaign.rank_by, campaign.largest_first ? "largest" : "smallest"),
                    {{"case", ""}, {"rank", ""}},
                    {},
                    ""};
  for (const std::string& path : campaign.paths) table.columns.push_back({path, ""});
  for (std::size_t k = 0; k < campaign.watch.size(); ++k) table.columns.push_back({campaign.watch[k], campaign.watch_units[k]});
  PageTable shown{table, true, true, {}, most_case_rows, true};
  for (std::size_t place = 0; place < order.size() && place < most_case_rows; ++place) {
    const CampaignCase& one = campaign.cases[order[place]];
    std::vector<TextTableWriter::Cell> row = {fmt::format("{}", one.number), fmt::format("{}", place + 1)};
    for (std::size_t k = 0; k < campaign.paths.size(); ++k) row.emplace_back(k < one.inputs.size() ? one.inputs[k] : std::string());
    for (std::size_t k = 0; k < campaign.watch.size(); ++k) row.emplace_back(k < one.watched.size() ? one.watched[k] : std::nan(""));
    shown.table.rows.push_back(std::move(row));
    shown.links.push_back(one.page);
  }
  if (order.size() > most_case_rows)
    shown.table.note = fmt::format("The leading {} of {} cases that are done; the ledger holds all.", most_case_rows, order.size());
  page.paragraph("Press a heading to sort. A case whose number is a link has its own page.");
  page.table(shown);
}

void add_cloud(PageBuilder& page, const CampaignResult& campaign, const std::vector<std::size_t>& order) {
  constexpr std::size_t most_points = 2000;
  if (campaign.watch.size() < 2 || order.size() < 2) return;
  page.section("trade", "One result against another");
  CloudChart cloud;
  cloud.id = "trade";
  const std::vector<std::size_t> points = picked(order.size(), most_points);
  for (std::size_t point : points) cloud.numbers.push_back(campaign.cases[order[point]].number);
  for (std::size_t k = 0; k < campaign.watch.size(); ++k) {
    CloudChart::Result result{
        campaign.watch[k], with_unit(campaign.watch[k], campaign.watch_units[k]), campaign.watch_units[k] == "1" ? "" : campaign.watch_units[k], {}};
    for (std::size_t point : points)
      result.values.push_back(k < campaign.cases[order[point]].watched.size() ? campaign.cases[order[point]].watched[k] : std::nan(""));
    cloud.results.push_back(std::move(result));
  }
  for (std::size_t k = 0; k < campaign.paths.size(); ++k) {
    CloudChart::Input input{campaign.paths[k], {}};
    for (std::size_t point : points)
      input.values.push_back(k < campaign.cases[order[point]].inputs.size() ? campaign.cases[order[point]].inputs[k] : std::string());
    cloud.inputs.push_back(std::move(input));
  }
  std::string reading =
      "A point is a case that is done; choose what stands across and up, and by which input the points are told apart. Its numbers stand in the "
      "ranking table.";
  if (points.size() < order.size())
    reading += fmt::format(" {} of {} cases are drawn, evenly picked along the ranking.", points.size(), order.size());
  page.cloud(cloud, "Results of the cases against each other", reading);
}

void add_failures(PageBuilder& page, const CampaignResult& campaign) {
  struct Group {
    int count = 0;
    std::string status, example;
    int number = 0;
  };
  std::map<std::pair<std::string, std::string>, Group> groups;
  for (const CampaignCase& one : campaign.cases) {
    if (one.status == CaseStatus::done || one.status == CaseStatus::waiting) continue;
    Group& group = groups[{said(one.status), one.reason_group.empty() ? one.reason : one.reason_group}];
    if (group.count++ > 0) continue;
    group.number = one.number;
    for (std::size_t k = 0; k < campaign.paths.size() && k < one.inputs.size(); ++k)
      group.example += (group.example.empty() ? "" : ", ") + campaign.paths[k] + " " + one.inputs[k];
  }
  if (groups.empty()) return;
  page.section("failures", "Cases that are not done");
  ResultTable table{"failures", "By reason", {{"status", ""}, {"cases", ""}, {"reason", ""}, {"first case", ""}, {"its inputs", ""}}, {}, ""};
  std::vector<std::pair<int, std::vector<TextTableWriter::Cell>>> rows;
  for (const auto& [key, group] : groups)
    rows.push_back({group.count, {key.first, fmt::format("{}", group.count), key.second, fmt::format("{}", group.number), group.example}});
  std::stable_sort(rows.begin(), rows.end(), [](const auto& a, const auto& b) { return a.first > b.first; });
  for (auto& [count, row] : rows) table.rows.push_back(std::move(row));
  page.table({table, table.rows.size() > 8, table.rows.size() > 12, {}, most_rows});
}

}  // namespace

std::vector<std::size_t> ranked_cases(const CampaignResult& campaign) {
  const std::size_t by = rank_column(campaign);
  std::vector<std::size_t> order;
  for (std::size_t k = 0; k < campaign.cases.size(); ++k)
    if (campaign.cases[k].status == CaseStatus::done) order.push_back(k);
  if (by >= campaign.watch.size()) return order;
  const auto value = [&](std::size_t k) {
    const double v = by < campaign.cases[k].watched.size() ? campaign.cases[k].watched[by] : std::nan("");
    return std::isnan(v) ? -INFINITY : campaign.largest_first ? v : -v;
  };
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) { return value(a) > value(b); });
  return order;
}

void add_campaign(PageBuilder& page, const CampaignResult& campaign) {
  const std::vector<std::size_t> order = ranked_cases(campaign);
  page.section("answer", "The answer");
  add_counts(page, campaign, order);
  add_caution_boxes(page, campaign.cautions);
  ResultTable meanings{"watched", "What is watched", {{"result", ""}, {"unit", ""}, {"meaning", ""}}, {}, ""};
  for (std::size_t k = 0; k < campaign.watch.size(); ++k)
    meanings.rows.push_back({campaign.watch[k], campaign.watch_units[k] == "1" ? std::string() : campaign.watch_units[k],
                             k < campaign.watch_meanings.size() ? campaign.watch_meanings[k] : std::string()});
  page.table({meanings, false, false, {}, most_rows});
  add_effects(page, campaign);
  add_cloud(page, campaign, order);
  add_ranking(page, campaign, order);
  add_failures(page, campaign);
  page.section("campaign", "Campaign file");
  page.html("<pre class=\"copy\" tabindex=\"0\">" + escaped(campaign.campaign_text) + "</pre>\n");
  if (!campaign.base_text.empty()) {
    page.heading("The case it varies: " + campaign.base_file);
    page.html("<details><summary>Its text</summary>\n<pre class=\"copy\" tabindex=\"0\">" + escaped(campaign.base_text) + "</pre>\n</details>\n");
  }
  if (!campaign.digest.empty()) page.paragraph("Digest of all cases: " + campaign.digest, "note");
}

}  // namespace leat
