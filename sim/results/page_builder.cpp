#include <algorithm>
#include <cmath>

#include "sim/results/page_parts.hpp"
#include "sim/results/page_scripts.hpp"
#include "sim/results/utf8.hpp"

namespace leat {
namespace {

// Where all views together would be too long a table, the first stands for them; what is to be said about it.
std::string shorten(PageChart& chart) {
  const std::size_t rows = std::max(chart.labels.size(), chart.numbers.size());
  if (chart.views.size() < 2 || rows * chart.views.size() <= most_rows) return chart.table_note;
  const std::string note = "The table holds the first choice, " + chart.views.front().name + "; the results file holds all. " + chart.table_note;
  chart.views.resize(1);
  return note;
}

// The chart's numbers: along x a row each, a column a series; several views one after the other, each row with its view's name.
ResultTable numbers_of(PageChart chart) {
  const std::string note = shorten(chart);
  ResultTable table{chart.id, "", {}, {}, note};
  const bool several = chart.views.size() > 1;
  if (several) table.columns.push_back({chart.choose.empty() ? "of" : chart.choose, ""});
  table.columns.push_back({chart.x.title.empty() ? "at" : chart.x.title, ""});
  std::vector<std::string> names;  // of all views, each once
  for (const ChartView& view : chart.views)
    for (const ChartSeries& one : view.series)
      if (std::find(names.begin(), names.end(), one.name) == names.end()) names.push_back(one.name);
  const auto title = [&](const std::string& name) {
    for (const ChartView& view : chart.views)
      for (const ChartSeries& one : view.series)
        if (one.name == name) return one.right && view.right ? view.right->unit : view.y.unit;
    return std::string();
  };
  for (const std::string& name : names) table.columns.push_back({name, title(name)});
  for (const ChartView& view : chart.views) {
    std::vector<double> at = chart.numbers;  // of all series, where they have their own
    for (const ChartSeries& one : view.series) at.insert(at.end(), one.at.begin(), one.at.end());
    std::sort(at.begin(), at.end());
    at.erase(std::unique(at.begin(), at.end()), at.end());
    const std::size_t rows = chart.labels.empty() ? at.size() : chart.labels.size();
    for (std::size_t r = 0; r < rows; ++r) {
      std::vector<TextTableWriter::Cell> cells;
      if (several) cells.emplace_back(view.name);
      if (chart.labels.empty())
        cells.emplace_back(at[r]);
      else
        cells.emplace_back(chart.labels[r]);
      for (const std::string& name : names) {
        const auto series = std::find_if(view.series.begin(), view.series.end(), [&](const ChartSeries& one) { return one.name == name; });
        double value = std::nan("");
        if (series != view.series.end()) {
          const std::vector<double>& own = series->at.empty() ? chart.numbers : series->at;
          std::size_t place = r;
          if (chart.labels.empty()) place = std::size_t(std::find(own.begin(), own.end(), at[r]) - own.begin());
          if (place < series->values.size()) value = series->values[place];
        }
        cells.emplace_back(value);
      }
      table.rows.push_back(std::move(cells));
    }
  }
  return table;
}

bool anything(const PageChart& chart) {
  for (const ChartView& view : chart.views)
    for (const ChartSeries& one : view.series)
      if (std::any_of(one.values.begin(), one.values.end(), [](double value) { return std::isfinite(value); })) return true;
  return false;
}

std::string figure_head(const std::string& id, std::string_view title, std::string_view reading) {
  return "<figure id=\"figure-" + id + "\"><figcaption><strong>" + escaped(title) + ".</strong> <span>" + escaped(reading) +
         "</span></figcaption>\n<div class=\"plot\" data-chart=\"" + id + "\" role=\"group\" aria-label=\"" + escaped(title) +
         "\"></div>\n<p class=\"unscripted\">The chart is drawn by the page's scripts, which do not run here; its numbers stand below.</p>\n";
}

}  // namespace

void PageBuilder::close_section() {
  if (!contents_.empty()) body_ += "</section>\n";
}

void PageBuilder::section(std::string id, std::string title) {
  close_section();
  body_ += "<section id=\"" + id + "\" aria-labelledby=\"" + id + "-title\">\n<h2 id=\"" + id + "-title\">" + escaped(title) + "</h2>\n";
  contents_.emplace_back(std::move(id), std::move(title));
}

void PageBuilder::heading(std::string_view text) { body_ += "<h3>" + escaped(text) + "</h3>\n"; }

void PageBuilder::paragraph(std::string_view text, std::string_view css_class) {
  body_ += css_class.empty() ? "<p>" : "<p class=\"" + std::string(css_class) + "\">";
  body_ += escaped(text) + "</p>\n";
}

void PageBuilder::chart(const PageChart& chart) {
  if (!anything(chart)) return;
  body_ += figure_head(chart.id, chart.title, chart.reading) + "<details><summary>Its numbers as a table</summary>\n";
  const ResultTable numbers = numbers_of(chart);
  table({numbers, false, numbers.rows.size() > 16, {}, most_rows});
  body_ += "</details>\n</figure>\n";
  charts_.push_back(chart);
}

void PageBuilder::cloud(const CloudChart& chart, std::string_view title, std::string_view reading) {
  body_ += figure_head(chart.id, title, reading) + "</figure>\n";
  clouds_.push_back(chart);
}

void PageBuilder::flow(const FlowDiagram& diagram) {
  body_ +=
      "<div class=\"diagram\" data-diagram></div>\n<p class=\"unscripted\">The diagram is drawn by the page's scripts, which do not run here; "
      "the streams table says where each stream comes from and goes to.</p>\n";
  diagrams_.push_back(diagram);
}

std::string PageBuilder::finish(const Head& head) const {
  const PageScripts scripts = page_scripts();
  std::string page =
      "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
      "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; script-src 'unsafe-inline'; style-src 'unsafe-inline'; img-src "
      "data: blob:; "
      "base-uri 'none'; form-action 'none'\">\n<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n"
      "<meta name=\"generator\" content=\"" +
      escaped(head.program) + "\">\n<title>" + escaped(head.title) + "</title>\n<style>";
  page += scripts.style;
  page += "</style>\n</head>\n<body>\n<a class=\"skip\" href=\"#main\">Skip to the content</a>\n<header class=\"top\">\n<p class=\"line\"><span>" +
          escaped(head.kind) + "</span><button type=\"button\" class=\"plain\" id=\"theme\" hidden>Light or dark</button></p>\n<h1>" +
          escaped(head.title) + "</h1>\n<p class=\"about\">" + escaped(head.about) +
          "</p>\n</header>\n<div class=\"layout\">\n<nav class=\"contents\" aria-label=\"Contents\"><ol>\n";
  for (const auto& [id, title] : contents_) page += "<li><a href=\"#" + id + "\">" + escaped(title) + "</a></li>\n";
  page += "</ol></nav>\n<main id=\"main\">\n" + body_ + (contents_.empty() ? "" : "</section>\n") + "</main>\n</div>\n<footer>\n<p>Written by " +
          escaped(head.program) +
          ". Complete in itself: it asks nothing of a network. The whole of the results stands in the results file.</p>\n"
          "<details><summary>Notices of the software inside this page</summary>\n<pre>";
  page += escaped(scripts.notices) + "</pre></details>\n</footer>\n<script type=\"application/json\" id=\"page-data\">" +
          page_data(charts_, clouds_, diagrams_) + "</script>\n";
  if (!diagrams_.empty()) page += "<script type=\"text/plain\" id=\"packed-diagram\">" + std::string(scripts.diagram) + "</script>\n";
  page += "<script type=\"text/plain\" id=\"packed-charts\">" + std::string(scripts.charts) + "</script>\n<script>" + std::string(scripts.loader) +
          "</script>\n</body>\n</html>\n";
  return page;
}

}  // namespace leat
