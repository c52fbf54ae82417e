#include "sim/results/page.hpp"

#include <stdexcept>

#include "sim/results/page_scripts.hpp"
#include "sim/results/page_sections.hpp"

namespace leat {

bool page_available() { return !page_scripts().charts.empty(); }

std::string page_of(const ResultSet& results) {
  const ResultView view(results);
  const std::string kind = view.attribute("leat_kind");
  const std::string from = "From " + view.attribute("leat_input_file");
  const std::string activity = view.attribute("leat_activity_model");
  const std::string model = activity.empty() ? "" : ", activity model " + activity;
  PageBuilder page;
  if (kind == "run") {
    add_run(page, view);
    return page.finish(head_of(view, "Circuit", from + ", " + view.attribute("leat_mode") + model));
  }
  if (kind == "beaker") {
    add_beaker(page, view);
    return page.finish(head_of(view, "Beaker", from + model));
  }
  if (kind == "ladder") {
    add_ladder(page, view);
    return page.finish(head_of(view, "Ladder", from + ", stepping " + view.attribute("leat_stepped_path")));
  }
  throw std::logic_error("there is no page of results of the kind '" + kind + "'");
}

std::string page_of(const CampaignResult& campaign) {
  PageBuilder page;
  add_campaign(page, campaign);
  const std::string part = campaign.shard.empty() ? "" : ", part " + campaign.shard;
  return page.finish({campaign.title.empty() ? campaign.file : campaign.title, "Campaign", campaign.program,
                      "From " + campaign.file + ", varying " + campaign.base_file + part});
}

}  // namespace leat
