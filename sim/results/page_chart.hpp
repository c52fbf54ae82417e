// Charts and the flow diagram of a page, in the page's own neutral words; page_json.cpp hands them to the scripts.
#pragma once

#include <optional>
#include <string>
#include <vector>

namespace leat {

struct ChartAxis {
  std::string title = {};             // with its unit, as shown
  std::string unit = {};              // behind a single value
  bool logarithmic = false;
  bool fit = false;                   // need not begin at zero
  std::optional<double> min = {}, max = {}, step = {};
};

struct ChartSeries {
  std::string name = {};
  std::vector<double> values = {};    // NaN: nothing there
  int look = -1;                      // colour, dash, marker and pattern; -1: in order
  std::string rest = {};              // rest-left, rest-lost, rest-formed: what is not recovered, in quiet tones
  std::string stroke = {};            // whole, dashed or none; empty: as its look says
  bool right = false;                 // on the right-hand axis, as a line
  std::vector<double> at = {};        // its own abscissas; empty: the chart's
};

// One picture of a chart; the reader chooses between several.
struct ChartView {
  std::string name = {};
  ChartAxis y = {};
  std::optional<ChartAxis> right = {};
  std::vector<ChartSeries> series = {};
};

enum class ChartKind { lines, areas, bars, columns, spans };  // bars are stacked, columns stand side by side; spans: low, mean, high

struct PageChart {
  std::string id = {};                // letters, digits and hyphens
  std::string title = {}, reading = {};  // what it is; what to read from it, in one sentence
  ChartKind kind = ChartKind::lines;
  ChartAxis x = {};
  std::vector<std::string> labels = {};  // along x; or
  std::vector<double> numbers = {};
  bool across = false;                // bars that run to the right
  int height = 0;                     // [px]; 0: as usual
  std::string choose = {};            // before the choice of views
  std::vector<ChartView> views = {};
  std::string table_note = {};        // where the table holds less than the chart
};

struct FlowNumber {
  std::string name = {}, unit = {};
  double value = 0;
};
struct FlowOperation {
  std::string name = {}, kind = {};
  bool air = false;                   // takes up oxygen from air
  std::vector<FlowNumber> facts = {};
};
struct FlowStream {
  std::string name = {}, from = {}, to = {}, leaves_as = {};
  std::vector<double> numbers = {};   // one a column of the diagram
};
struct FlowDiagram {
  std::vector<FlowOperation> operations = {};
  std::vector<FlowStream> streams = {};
  std::vector<FlowNumber> columns = {};  // name and unit of the streams' numbers; the first three: pulp, solids, mass
  std::vector<std::string> shorts = {};  // a short name for each, "" for none
  int chosen = -1;                    // shown besides the first two
};

// Results of a campaign's cases, against each other.
struct CloudChart {
  struct Result {
    std::string name = {}, title = {}, unit = {};
    std::vector<double> values = {};
  };
  struct Input {
    std::string name = {};
    std::vector<std::string> values = {};
  };
  std::string id = {};
  std::vector<int> numbers = {};      // of the cases
  std::vector<Result> results = {};
  std::vector<Input> inputs = {};
};

}  // namespace leat
