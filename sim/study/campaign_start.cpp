#include "sim/study/campaign_start.hpp"

#include <fmt/format.h>
#include <fmt/ranges.h>

#include <filesystem>
#include <map>

namespace leat {

CampaignResult waiting_campaign(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings) {
  CampaignResult campaign;
  campaign.title = spec.title;
  campaign.file = std::filesystem::path(spec.file).filename().string();
  campaign.program = settings.program;
  campaign.campaign_text = spec.text;
  campaign.base_file = spec.base.file;
  campaign.base_text = spec.base.text;
  campaign.paths = varied_paths(spec);
  campaign.path_units = varied_units(spec);
  campaign.watch = spec.watch;
  campaign.watch_units.resize(spec.watch.size());
  campaign.watch_meanings.resize(spec.watch.size());
  campaign.rank_by = spec.rank_by;
  campaign.largest_first = spec.largest_first;
  campaign.shard = settings.shard.text();
  const CaseIdentity identity{settings.program, settings.results_format, spec.through_time, spec.watch};
  for (int number = settings.shard.index; number <= case_count(spec); number += settings.shard.of) {
    CampaignCase one;
    one.number = number;
    const Inputs inputs = inputs_of(spec, number);
    for (const auto& [path, value] : inputs) one.inputs.push_back(value);
    one.hash = case_hash(work.text(inputs), identity);
    campaign.cases.push_back(std::move(one));
  }
  return campaign;
}

LedgerTerms terms_of(const CampaignSpec& spec, const CampaignSettings& settings) {
  return {settings.results_format, spec.through_time, spec.keep_results};
}

namespace {

// The first case that differs, told by its inputs.
std::string different_case(const CampaignResult& ledger, const CampaignResult& wanted) {
  std::map<int, const CampaignCase*> asked;
  for (const CampaignCase& one : wanted.cases) asked[one.number] = &one;
  for (const CampaignCase& one : ledger.cases) {
    const auto found = asked.find(one.number);
    if (found == asked.end()) return fmt::format("case {} is none of the campaign's", one.number);
    if (found->second->hash == one.hash) continue;
    for (std::size_t k = 0; k < ledger.paths.size(); ++k)
      if (one.inputs[k] != found->second->inputs[k])
        return fmt::format("case {} has {} = {} in the ledger, {} now", one.number, ledger.paths[k], one.inputs[k], found->second->inputs[k]);
    return fmt::format("case {} is another text", one.number);
  }
  return "";
}

}  // namespace

std::vector<std::string> differences(const CampaignResult& ledger, const LedgerTerms& ledger_terms, const CampaignResult& wanted,
                                     const LedgerTerms& terms, bool as_part) {
  std::vector<std::string> found;
  const auto compare = [&](const std::string& what, const std::string& was, const std::string& is) {
    if (was != is) found.push_back(fmt::format("{} is {} in the ledger, {} now", what, was.empty() ? "none" : was, is.empty() ? "none" : is));
  };
  const auto listed = [](const std::vector<std::string>& names) { return fmt::format("{}", fmt::join(names, ", ")); };
  const auto yes = [](bool value) { return std::string(value ? "true" : "false"); };
  compare("the program", ledger.program, wanted.program);
  compare("the file of the case", ledger.base_file, wanted.base_file);
  compare("the version of the results format", ledger_terms.results_format, terms.results_format);
  compare("what is varied", listed(ledger.paths), listed(wanted.paths));
  compare("watch", listed(ledger.watch), listed(wanted.watch));
  compare("through_time", yes(ledger_terms.through_time), yes(terms.through_time));
  compare("keep_results", yes(ledger_terms.keep_results), yes(terms.keep_results));
  if (!as_part) compare("the shard", ledger.shard, wanted.shard);
  if (ledger.base_text != wanted.base_text) found.push_back(fmt::format("the text of {} has changed", wanted.base_file));
  if (!found.empty()) return found;
  if (!as_part && ledger.cases.size() != wanted.cases.size()) {
    found.push_back(fmt::format("it has {} cases in the ledger, {} now", ledger.cases.size(), wanted.cases.size()));
    return found;
  }
  const std::string other = different_case(ledger, wanted);
  if (!other.empty()) found.push_back(other);
  return found;
}

}  // namespace leat
