// PageBuilder: puts a page together from sections, tables, charts and a diagram. All text is escaped on its way in.
#pragma once

#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "sim/results/page_chart.hpp"
#include "sim/results/result_tables.hpp"

namespace leat {

inline constexpr std::size_t most_rows = 200;      // of a static table and of a chart along time
inline constexpr std::size_t most_case_rows = 2000;

std::string escaped(std::string_view text);        // for HTML text and attributes; bytes that are not UTF-8 become U+FFFD
std::string kept_id(std::string_view text);        // lower-case letters, digits and hyphens

// At most so many of `count` rows, evenly picked, first and last among them.
std::vector<std::size_t> picked(std::size_t count, std::size_t most);

struct PageTable {
  ResultTable table;
  bool sortable = false;
  bool tall = false;           // scrolls inside a box
  std::vector<std::string> links;  // of the first cell, a relative address a row; may be empty
  std::size_t most = most_rows;
  bool searchable = false;
};

class PageBuilder {
 public:
  void section(std::string id, std::string title);
  void heading(std::string_view text);
  void paragraph(std::string_view text, std::string_view css_class = "");
  void html(std::string_view markup) { body_ += markup; }
  void table(const PageTable& table);
  void chart(const PageChart& chart);                 // nothing where there is nothing to draw
  void cloud(const CloudChart& chart, std::string_view title, std::string_view reading);
  void flow(const FlowDiagram& diagram);

  // The whole document.
  struct Head {
    std::string title, kind, program, about;
  };
  std::string finish(const Head& head) const;

 private:
  void close_section();
  std::string body_;
  std::vector<std::pair<std::string, std::string>> contents_;
  std::vector<PageChart> charts_;
  std::vector<CloudChart> clouds_;
  std::vector<FlowDiagram> diagrams_;
};

// The data block: JSON in which no `<` stands, so that it can stand inside a script element.
std::string page_data(const std::vector<PageChart>& charts, const std::vector<CloudChart>& clouds, const std::vector<FlowDiagram>& diagrams);

}  // namespace leat
