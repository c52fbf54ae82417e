#include <fmt/format.h>

#include <algorithm>

#include "models/core/nearest.hpp"
#include "sim/input/case_table.hpp"
#include "sim/input/read_study.hpp"
#include "sim/input/scalar_text.hpp"
#include "sim/input/study_reader.hpp"

namespace leat {
namespace {

constexpr double shortest_limit = 0.01, longest_limit = 30 * 86400;  // of one case [s]

class CampaignReader : public StudyReader {
 public:
  using StudyReader::StudyReader;

  void read(const YamlNode& root, CampaignSpec& campaign) {
    static const std::vector<std::string> keys = {"leat", "kind", "title", "of", "vary", "cases", "watch", "rank", "through_time", "time_limit", "keep_results"};
    if (!typed_.is_map(root) || !head(root, "campaign", campaign.title)) return;
    typed_.only_keys(root, keys);
    const YamlNode* of = typed_.required(root, "of");
    const auto open = of ? base_case(*of) : std::nullopt;
    if (open) campaign.base = open->base;
    open_ = open ? &*open : nullptr;
    const YamlNode* vary = root.find("vary");
    const YamlNode* cases = root.find("cases");
    if (!vary && !cases) typed_.required(root, "vary");
    if (vary) grid(*vary, campaign);
    if (cases) listed(*cases, campaign);
    count(root, campaign);
    if (const YamlNode* node = typed_.required(root, "watch")) watch(*node, campaign);
    if (!campaign.watch.empty()) campaign.rank_by = campaign.watch.front();
    if (const YamlNode* node = root.find("rank")) rank(*node, campaign);
    if (const YamlNode* node = root.find("through_time")) campaign.through_time = typed_.yes_no(*node).value_or(true);
    if (const YamlNode* node = root.find("keep_results")) campaign.keep_results = typed_.yes_no(*node).value_or(true);
    if (const YamlNode* node = root.find("time_limit"))
      campaign.time_limit = typed_.quantity(*node, "s", shortest_limit, longest_limit).value_or(campaign.time_limit);
  }

 private:
  // A path that names the value of another is given twice, however it is written.
  bool is_new(const std::string& path, const Place& place) {
    for (const auto& [other, where] : seen_) {
      if (!open_->text.same(path, other)) continue;
      const std::string spelling = path == other ? "" : fmt::format(", as '{}'", shown_text(other));
      fault(Code::duplicate, place, fmt::format("'{}' is varied twice; it stands already at {}:{}:{}{}", shown_text(path), where.file, where.line, where.column, spelling));
      return false;
    }
    seen_.emplace_back(path, place);
    return true;
  }

  void grid(const YamlNode& map, CampaignSpec& campaign) {
    if (!typed_.is_map(map)) return;
    if (map.entries.empty()) fault(Code::missing_key, map.place, "nothing to vary; write for example streams.wash.rate: 2 m3/h to 6 m3/h in 5 points");
    for (const YamlNode::Entry& entry : map.entries) {
      auto input = varied(entry, open_);
      if (input && is_new(input->path, input->place)) campaign.grid.push_back(std::move(*input));
    }
  }

  void listed(const YamlNode& node, CampaignSpec& campaign) {
    const auto name = typed_.text(node);
    if (!name) return;
    const std::string path = beside(*name);
    std::string why;
    const auto text = whole_text(path, why);
    if (!text) return fault(Code::unknown_name, node.place, fmt::format("'{}' {}; name a table of cases (CSV) by its path from the folder of this file", shown_text(*name), why));
    const auto table = read_case_table(*text, path, diagnostics_);
    if (!table || !open_) return;
    bool known = true;
    for (const TableCell& cell : table->header) {
      const Place place{path, cell.line, cell.column, ""};
      if (cell.text.empty()) fault(Code::missing_key, place, "an empty name in the header; write a path, such as streams.wash.rate"), known = false;
      else known = open_->text.has(cell.text, place, diagnostics_) && is_new(cell.text, place) && known;
    }
    if (!known) return;
    for (const auto& row : table->rows) {
      auto& one = campaign.listed.emplace_back();
      for (std::size_t k = 0; k < row.size(); ++k) one.emplace_back(table->header[k].text, row[k].text);
    }
  }

  void count(const YamlNode& root, const CampaignSpec& campaign) {
    double all = std::max<double>(1, static_cast<double>(campaign.listed.size()));
    for (const VariedInput& input : campaign.grid) all *= static_cast<double>(input.values.size());
    if (all <= static_cast<double>(most_cases)) return;
    const YamlNode* vary = root.find("vary");
    fault(Code::out_of_range, vary ? vary->place : root.place, fmt::format("the campaign has {:.7g} cases; {} are the most. Take fewer points", all, most_cases));
  }

  void watch(const YamlNode& node, CampaignSpec& campaign) {
    const auto take = [&](const YamlNode& item) {
      const auto name = typed_.text(item);
      if (!name) return;
      if (std::find(campaign.watch.begin(), campaign.watch.end(), *name) != campaign.watch.end())
        return fault(Code::duplicate, item.place, fmt::format("'{}' is watched twice", shown_text(*name)));
      campaign.watch.push_back(*name);
      campaign.watch_places.push_back(item.place);
    };
    if (node.is_map()) return fault(Code::wrong_kind, node.place, "a map stands here; write a list of names, such as [recovery.Ag, ph.L.1]");
    if (node.is_scalar()) return take(node);
    if (node.items.empty()) fault(Code::missing_key, node.place, "nothing is watched; write names of results, such as [recovery.Ag, ph.L.1]");
    for (const YamlNode& item : node.items) take(item);
  }

  void rank(const YamlNode& map, CampaignSpec& campaign) {
    static const std::vector<std::string> keys = {"by", "best"}, ends = {"largest", "smallest"};
    if (!typed_.is_map(map)) return;
    typed_.only_keys(map, keys);
    if (const YamlNode* node = typed_.required(map, "by"); node && !campaign.watch.empty())
      if (const auto name = typed_.choice(*node, campaign.watch)) campaign.rank_by = *name;
    if (const YamlNode* node = map.find("best")) campaign.largest_first = typed_.choice(*node, ends).value_or("largest") == "largest";
  }

  const OpenCase* open_ = nullptr;
  std::vector<std::pair<std::string, Place>> seen_;
};

}  // namespace

std::optional<CampaignSpec> read_campaign(std::string_view text, const std::string& file, Diagnostics& diagnostics) {
  const auto root = read_yaml(text, file, diagnostics);
  if (!root) return std::nullopt;
  const std::size_t before = diagnostics.faults().size();
  CampaignSpec campaign;
  campaign.file = file;
  campaign.text = text;
  CampaignReader(file, diagnostics).read(*root, campaign);
  return diagnostics.faults().size() == before ? std::optional(std::move(campaign)) : std::nullopt;
}

}  // namespace leat
