// What a campaign begins with: its rows, all waiting, and whether a ledger is one of this very campaign.
#pragma once

#include <string>
#include <vector>

#include "sim/study/campaign.hpp"
#include "sim/study/ledger.hpp"

namespace leat {

CampaignResult waiting_campaign(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings);
LedgerTerms terms_of(const CampaignSpec& spec, const CampaignSettings& settings);

// What decides the results and differs, a sentence each; empty if the ledger may go on. Titles, comments, ranking and time
// limits may change. A ledger of a shard may be asked about the whole (`as_part`).
std::vector<std::string> differences(const CampaignResult& ledger, const LedgerTerms& ledger_terms, const CampaignResult& wanted,
                                     const LedgerTerms& terms, bool as_part);

}  // namespace leat
