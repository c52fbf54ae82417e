#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"
#include "sim/results/page_sections.hpp"
#include "sim/results/result_access.hpp"

namespace leat {
namespace {

constexpr double hour = 3600;  // [s]

double ratio(double part, double whole) { return whole > 0 ? part / whole : std::nan(""); }

FlowOperation operation_of(const ResultView& view, const Moment& now, std::size_t index) {
  FlowOperation made{view.labels("operation")[index], view.text("operation_kind", index), false, {}};
  const std::vector<std::string>& vessels = view.labels("unit");
  const auto found = std::find(vessels.begin(), vessels.end(), made.name);
  if (found == vessels.end()) return made;
  const std::size_t u = static_cast<std::size_t>(found - vessels.begin());
  made.air = !std::isnan(now.at("oxygen_taken_up", {u}));
  const double volume = now.at("pulp_volume", {u});
  made.facts = {{"volume", "m³", volume},
                {"residence time", "h", ratio(volume, now.at("outlet_flow", {u})) / hour},
                {"temperature", "°C", now.at("temperature", {u}) - zero_celsius},
                {"pH", "1", now.at("ph", {u})},
                {"ionic strength", "mol/kg", now.at("ionic_strength", {u})},
                {"solids", "%", 100 * now.at("solids_fraction", {u})}};
  for (std::size_t m = 0; m < view.size("mineral"); ++m)
    if (const double formed = now.at("formed", {u, m}); formed > 0) made.facts.push_back({view.labels("mineral")[m] + " formed", "mol", formed});
  return made;
}

FlowStream stream_of(const ResultView& view, const Moment& now, std::size_t s) {
  FlowStream made{view.labels("stream")[s], view.text("stream_from", s), view.text("stream_to", s), view.text("stream_leaves_as", s), {}};
  const double liquor = now.at("stream_liquor_flow", {s}), solids = now.at("stream_solids_flow", {s});
  made.numbers = {now.at("stream_pulp_flow", {s}) * hour,
                  solids * hour / 1000,
                  now.at("stream_mass_flow", {s}) * hour / 1000,
                  liquor * hour,
                  100 * ratio(solids, now.at("stream_mass_flow", {s})),
                  now.at("stream_ph", {s})};
  for (std::size_t e = 0; e < view.size("element"); ++e) made.numbers.push_back(1000 * ratio(now.at("stream_metal_dissolved", {s, e}), liquor));
  for (std::size_t e = 0; e < view.size("element"); ++e)
    made.numbers.push_back(
        (now.at("stream_metal_dissolved", {s, e}) + now.at("stream_metal_undissolved", {s, e}) + now.at("stream_metal_formed", {s, e})) * hour);
  return made;
}

}  // namespace

void add_flow(PageBuilder& page, const ResultView& view, const Moment& now) {
  if (!find_texts(view.results(), "stream_from") || view.size("operation") == 0) return;
  FlowDiagram flow;
  flow.columns = {{"pulp", "m³/h"}, {"solids", "t/h"}, {"mass", "t/h"}, {"liquor", "m³/h"}, {"solids by mass", "%"}, {"pH", "1"}};
  flow.shorts = {"", "", "", "liquor", "solids", "pH"};
  for (const std::string& metal : view.labels("element")) {
    flow.columns.push_back({metal + " dissolved", "mg/L"});
    flow.shorts.push_back(metal);
  }
  for (const std::string& metal : view.labels("element")) {
    flow.columns.push_back({metal + " in all, solids too", "kg/h"});
    flow.shorts.push_back(metal);
  }
  if (view.size("element") > 0) flow.chosen = 6;
  for (std::size_t k = 0; k < view.size("operation"); ++k) flow.operations.push_back(operation_of(view, now, k));
  for (std::size_t s = 0; s < view.size("stream"); ++s) flow.streams.push_back(stream_of(view, now, s));
  page.section("flow", "Flow diagram");
  page.paragraph("The circuit " + now.words() + ". Streams carry their pulp flow, their solids and a value of your choice.");
  page.flow(flow);
}

}  // namespace leat
