// campaign_tables: the tables of a campaign, from what its ledger holds.
#pragma once

#include <vector>

#include "sim/results/result_tables.hpp"
#include "sim/study/campaign_result.hpp"

namespace leat {

// Counts by status, the leading cases, the reasons of those that are not done, and all cases last; table_names("campaign")
// names them.
std::vector<ResultTable> tables_of(const CampaignResult& campaign);

}  // namespace leat
