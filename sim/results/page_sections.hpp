// Sections that pages of several kinds share, and the pages of each kind.
#pragma once

#include <functional>
#include <string>
#include <vector>

#include "sim/results/page_parts.hpp"
#include "sim/results/result_view.hpp"
#include "sim/study/campaign_result.hpp"

namespace leat {

// The tables of a results file, taken one by one to where they belong; what is left over is shown at the end.
class TableShelf {
 public:
  explicit TableShelf(std::vector<ResultTable> tables) : tables_(std::move(tables)) {}
  bool has(std::string_view name) const;
  void take(PageBuilder& page, std::string_view name, bool tall = false);
  void drop(std::string_view name);
  void take_rest(PageBuilder& page);

 private:
  std::vector<ResultTable> tables_;
};

// Lines "kind: text": those about harm to people first and apart.
void add_caution_boxes(PageBuilder& page, const std::vector<std::string>& lines);
// Failure text, hazards and other cautions.
void add_cautions(PageBuilder& page, const ResultView& view);
// "All balances close to 3e-15", from the worst of the closures; nothing where there are none.
std::string closure_words(const ResultView& view);
void add_constants(PageBuilder& page, const ResultView& view);
void add_facts(PageBuilder& page, const ResultView& view, TableShelf& shelf);
void add_input(PageBuilder& page, const ResultView& view);
// What every page of a results file ends with: constants, facts, tables not shown yet, input.
void add_ending(PageBuilder& page, const ResultView& view, TableShelf& shelf);
PageBuilder::Head head_of(const ResultView& view, std::string kind, const std::string& about);

// Whether a component's forms are worth showing: neither water nor the proton.
bool of_interest(const ResultView& view, std::size_t component);
bool is_metal(const ResultView& view, std::size_t component);

// How the species share each component, a column a place (vessel, step): one view a component. amounts(place, species): molality.
// The largest `most` species stand by name, the rest together.
std::vector<ChartView> sharing_views(const ResultView& view, std::size_t places, const std::function<double(std::size_t, std::size_t)>& amount,
                                     const std::function<bool(std::size_t component)>& wanted, std::size_t most = 8);

// An axis of pH between whole halves around all values.
ChartAxis ph_axis(const std::vector<ChartSeries>& series);

void add_run(PageBuilder& page, const ResultView& view);
void add_flow(PageBuilder& page, const ResultView& view, const Moment& now);
void add_stage_charts(PageBuilder& page, const ResultView& view, const Moment& now);
void add_history(PageBuilder& page, const ResultView& view, TableShelf& shelf);
void add_beaker(PageBuilder& page, const ResultView& view);
void add_ladder(PageBuilder& page, const ResultView& view);
void add_campaign(PageBuilder& page, const CampaignResult& campaign);
void add_effects(PageBuilder& page, const CampaignResult& campaign);
std::string with_unit(const std::string& name, const std::string& unit);  // "name, unit"; the name alone without one
std::size_t rank_column(const CampaignResult& campaign);                  // which watched result is ranked by; their number: none

}  // namespace leat
