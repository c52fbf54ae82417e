#include "sim/results/campaign_tables.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <map>

#include "sim/results/page.hpp"

namespace leat {
namespace {

using Row = std::vector<TextTableWriter::Cell>;
constexpr std::size_t leading = 10;  // cases of the ranking

ResultTable status_table(const CampaignResult& campaign) {
  std::map<CaseStatus, int> counts;
  for (const CampaignCase& one : campaign.cases) ++counts[one.status];
  ResultTable table{"status", "Cases by status", {{"status", ""}, {"cases", ""}}, {}, ""};
  for (const auto& [status, count] : counts) table.rows.push_back({to_string(status), std::to_string(count)});
  return table;
}

void add_columns(ResultTable& table, const CampaignResult& campaign) {
  for (std::size_t k = 0; k < campaign.watch.size(); ++k) table.columns.push_back({campaign.watch[k], campaign.watch_units[k]});
  for (const std::string& path : campaign.paths) table.columns.push_back({path, ""});
}

void add_values(Row& row, const CampaignCase& one) {
  for (const double value : one.watched) row.emplace_back(value);
  for (const std::string& value : one.inputs) row.emplace_back(value);
}

ResultTable ranking_table(const CampaignResult& campaign) {
  const std::string order = campaign.rank_by.empty() ? "number" : fmt::format("{}, {} first", campaign.rank_by, campaign.largest_first ? "largest" : "smallest");
  ResultTable table{"ranking", "Leading cases by " + order, {{"case", ""}}, {}, ""};
  add_columns(table, campaign);
  for (const std::size_t k : ranked_cases(campaign)) {
    if (table.rows.size() == leading) break;
    Row row = {std::to_string(campaign.cases[k].number)};
    add_values(row, campaign.cases[k]);
    table.rows.push_back(std::move(row));
  }
  return table;
}

ResultTable failures_table(const CampaignResult& campaign) {
  struct Group {
    int count = 0;
    const CampaignCase* first = nullptr;
  };
  std::map<std::pair<CaseStatus, std::string>, Group> groups;
  for (const CampaignCase& one : campaign.cases) {
    if (one.status == CaseStatus::done || one.status == CaseStatus::waiting) continue;
    Group& group = groups[{one.status, one.reason_group}];
    if (group.count++ == 0) group.first = &one;
  }
  std::vector<Group> order;
  for (const auto& [key, group] : groups) order.push_back(group);
  std::stable_sort(order.begin(), order.end(), [](const Group& a, const Group& b) { return a.count > b.count; });
  ResultTable table{"failures", "Cases that are not done, by reason", {{"status", ""}, {"cases", ""}, {"first case", ""}, {"reason of the first", ""}}, {}, ""};
  for (const Group& group : order)
    table.rows.push_back({to_string(group.first->status), std::to_string(group.count), std::to_string(group.first->number), group.first->reason});
  return table;
}

ResultTable cases_table(const CampaignResult& campaign) {
  ResultTable table{"cases", "All cases", {{"case", ""}, {"status", ""}}, {}, ""};
  add_columns(table, campaign);
  for (const TableColumn& column : {TableColumn{"time", "s"}, {"reason", ""}, {"results file", ""}}) table.columns.push_back(column);
  for (const CampaignCase& one : campaign.cases) {
    Row row = {std::to_string(one.number), to_string(one.status)};
    add_values(row, one);
    row.emplace_back(one.seconds);
    row.emplace_back(one.reason);
    row.emplace_back(one.results_file);
    table.rows.push_back(std::move(row));
  }
  return table;
}

}  // namespace

std::vector<ResultTable> tables_of(const CampaignResult& campaign) {
  return {status_table(campaign), ranking_table(campaign), failures_table(campaign), cases_table(campaign)};
}

}  // namespace leat
