#include "sim/results/page.hpp"

#include <stdexcept>

#include "sim/results/page_scripts.hpp"
#include "sim/results/page_sections.hpp"

namespace leat {
namespace {

std::string without_folder(const std::string& path) { return path.substr(path.rfind('/') == std::string::npos ? 0 : path.rfind('/') + 1); }

}  // namespace

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
    const bool alone = view.size("series_name") < 2;
    return page.finish(head_of(view, "Ladder", from + (alone ? ", stepping " + view.attribute("leat_stepped_path") : ", series side by side")));
  }
  throw std::logic_error("there is no page of results of the kind '" + kind + "'");
}

std::string page_of(const CampaignResult& campaign) {
  PageBuilder page;
  add_campaign(page, campaign);
  const std::string part = campaign.shard.empty() ? "" : ", part " + campaign.shard;
  return page.finish({campaign.title.empty() ? without_folder(campaign.file) : campaign.title, "Campaign", campaign.program,
                      "From " + without_folder(campaign.file) + ", varying " + without_folder(campaign.base_file) + part});
}

}  // namespace leat
