// page: one self-contained HTML file about a results file or a campaign. Nothing in it comes from a network.
#pragma once

#include <string>
#include <vector>

#include "sim/results/result_set.hpp"
#include "sim/study/campaign_result.hpp"

namespace leat {

// Whether this program was built with the page's scripts.
bool page_available();

// The page of a run, beaker or ladder (attribute leat_kind). std::logic_error for another kind.
std::string page_of(const ResultSet& results);

// Places in `cases` of those that are done, best first; those without a value last, equal ones by number.
std::vector<std::size_t> ranked_cases(const CampaignResult& campaign);

// The page of a campaign; cases whose page path is given are linked.
std::string page_of(const CampaignResult& campaign);

}  // namespace leat
