#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <nlohmann/json.hpp>

#include "sim/results/page_parts.hpp"
#include "sim/results/utf8.hpp"

namespace leat {
namespace {

using Json = nlohmann::ordered_json;

// Six digits are more than a chart shows.
Json number(double value) {
  if (!std::isfinite(value)) return nullptr;
  char text[40];
  std::snprintf(text, sizeof text, "%.6g", value);
  return std::strtod(text, nullptr);
}

Json numbers(const std::vector<double>& values) {
  Json list = Json::array();
  for (double value : values) list.push_back(number(value));
  return list;
}

Json word(const std::string& text) { return readable_text(text); }

Json words(const std::vector<std::string>& texts) {
  Json list = Json::array();
  for (const std::string& text : texts) list.push_back(word(text));
  return list;
}

Json axis_json(const ChartAxis& axis) {
  Json json = {{"title", word(axis.title)}, {"unit", word(axis.unit)}};
  if (axis.logarithmic) json["log"] = true;
  if (axis.fit) json["fit"] = true;
  if (axis.min) json["min"] = number(*axis.min);
  if (axis.max) json["max"] = number(*axis.max);
  if (axis.step) json["step"] = number(*axis.step);
  return json;
}

Json series_json(const ChartSeries& series) {
  Json json = {{"name", word(series.name)}, {"values", numbers(series.values)}};
  if (series.look >= 0) json["look"] = series.look;
  if (!series.rest.empty()) json["rest"] = series.rest;
  if (series.stroke == "none")
    json["loose"] = true;
  else if (!series.stroke.empty())
    json["dash"] = series.stroke == "dashed" ? Json{4, 4} : Json::array();
  if (series.right) json["right"] = true;
  if (!series.at.empty()) json["x"] = numbers(series.at);
  return json;
}

Json view_json(const PageChart& chart, const ChartView& view) {
  Json json = {{"name", word(view.name)}, {"y", axis_json(view.y)}};
  if (view.right) json["right"] = axis_json(*view.right);
  if (chart.kind == ChartKind::spans) {
    const char* const names[] = {"low", "mean", "high"};
    for (std::size_t k = 0; k < 3; ++k) json[names[k]] = numbers(view.series[k].values);
    return json;
  }
  json["series"] = Json::array();
  for (const ChartSeries& series : view.series) json["series"].push_back(series_json(series));
  return json;
}

Json chart_json(const PageChart& chart) {
  const char* const kinds[] = {"lines", "areas", "bars", "columns", "spans"};
  Json json = {{"id", chart.id}, {"kind", kinds[static_cast<int>(chart.kind)]}, {"x", axis_json(chart.x)}, {"choose", word(chart.choose)}};
  if (!chart.labels.empty())
    json["x"]["labels"] = words(chart.labels);
  else if (!chart.numbers.empty())
    json["x"]["numbers"] = numbers(chart.numbers);
  if (chart.across) json["across"] = true;
  if (chart.height > 0) json["height"] = chart.height;
  json["views"] = Json::array();
  for (const ChartView& view : chart.views) json["views"].push_back(view_json(chart, view));
  return json;
}

Json cloud_json(const CloudChart& cloud) {
  Json json = {{"id", cloud.id}, {"kind", "cloud"}, {"numbers", cloud.numbers}, {"results", Json::array()}, {"inputs", Json::array()}};
  for (const CloudChart::Result& one : cloud.results)
    json["results"].push_back({{"name", word(one.name)}, {"title", word(one.title)}, {"unit", word(one.unit)}, {"values", numbers(one.values)}});
  for (const CloudChart::Input& one : cloud.inputs) json["inputs"].push_back({{"name", word(one.name)}, {"values", words(one.values)}});
  return json;
}

Json flow_json(const FlowDiagram& flow) {
  Json json = {{"operations", Json::array()},
               {"streams", Json::array()},
               {"columns", Json::array()},
               {"always", {0, 1}},
               {"solids", 1},
               {"mass", 2},
               {"chosen", nullptr}};
  if (flow.chosen >= 0) json["chosen"] = flow.chosen;
  for (const FlowOperation& one : flow.operations) {
    Json facts = Json::array();
    for (const FlowNumber& fact : one.facts) facts.push_back({{"name", word(fact.name)}, {"value", number(fact.value)}, {"unit", word(fact.unit)}});
    json["operations"].push_back({{"name", word(one.name)}, {"kind", word(one.kind)}, {"facts", facts}});
    if (one.air) json["operations"].back()["air"] = true;
  }
  for (const FlowStream& one : flow.streams)
    json["streams"].push_back({{"name", word(one.name)},
                               {"from", word(one.from)},
                               {"to", word(one.to)},
                               {"leaves", word(one.leaves_as)},
                               {"numbers", numbers(one.numbers)}});
  for (std::size_t k = 0; k < flow.columns.size(); ++k)
    json["columns"].push_back({{"name", word(flow.columns[k].name)}, {"unit", word(flow.columns[k].unit)}, {"short", word(flow.shorts[k])}});
  return json;
}

}  // namespace

std::string page_data(const std::vector<PageChart>& charts, const std::vector<CloudChart>& clouds, const std::vector<FlowDiagram>& diagrams) {
  Json json = {{"charts", Json::array()}, {"flow", nullptr}};
  for (const PageChart& chart : charts) json["charts"].push_back(chart_json(chart));
  for (const CloudChart& cloud : clouds) json["charts"].push_back(cloud_json(cloud));
  if (!diagrams.empty()) json["flow"] = flow_json(diagrams.front());
  std::string text;
  for (char c : json.dump()) {
    if (c == '<')
      text += "\\u003c";
    else
      text += c;
  }
  return text;
}

}  // namespace leat
