#include <cmath>
#include <fmt/format.h>

#include "sim/results/page_parts.hpp"
#include "sim/results/utf8.hpp"

namespace leat {
namespace {

constexpr std::size_t long_cell = 44;  // [characters] from here a cell of text may break into lines

std::string shown(const ResultTable& table, std::size_t column, double value) {
  const int decimals = table.columns[column].decimals;
  return decimals >= 0 && std::isfinite(value) ? fmt::format("{:.{}f}", value, decimals) : significant(value, table.digits);
}

struct ColumnLook {
  bool numeric = false, wide = false;
};

std::vector<ColumnLook> looks_of(const ResultTable& table) {
  std::vector<ColumnLook> looks(table.columns.size());
  for (const auto& row : table.rows)
    for (std::size_t k = 0; k < row.size(); ++k) {
      const std::string* text = std::get_if<std::string>(&row[k]);
      if (!text)
        looks[k].numeric = true;
      else if (text->size() > long_cell)
        looks[k].wide = true;
    }
  return looks;
}

// A path may break into lines after each of its points.
std::string header_html(const std::string& header) {
  std::string html = escaped(header);
  if (header.find(' ') != std::string::npos) return html;
  for (std::size_t at = html.find('.'); at != std::string::npos; at = html.find('.', at + 6)) html.insert(at + 1, "<wbr>");
  return html;
}

// Numbers in full for sorting, as they are in the file.
std::string cell_html(const PageTable& page, std::size_t row, std::size_t column, const ColumnLook& look) {
  const auto& cell = page.table.rows[row][column];
  const char* tag = column == 0 ? "th" : "td";
  std::string open = fmt::format("<{}{}", tag, column == 0 ? " scope=\"row\"" : "");
  if (look.numeric || look.wide) open += look.numeric ? " class=\"n\"" : " class=\"long\"";
  std::string inside;
  if (const double* number = std::get_if<double>(&cell)) {
    if (std::isfinite(*number)) open += fmt::format(" data-v=\"{}\"", *number);
    inside = shown(page.table, column, *number);
  } else {
    inside = escaped(std::get<std::string>(cell));
  }
  if (column == 0 && row < page.links.size() && !page.links[row].empty()) inside = "<a href=\"" + escaped(page.links[row]) + "\">" + inside + "</a>";
  return open + ">" + inside + fmt::format("</{}>", tag);
}

}  // namespace

std::string escaped(std::string_view text) {
  std::string out;
  for (char c : readable_text(text)) {
    if (c == '&')
      out += "&amp;";
    else if (c == '<')
      out += "&lt;";
    else if (c == '>')
      out += "&gt;";
    else if (c == '"')
      out += "&quot;";
    else if (c == '\'')
      out += "&#39;";
    else if (c == '\r')
      out += "&#13;";
    else
      out += c;
  }
  return out;
}

std::string kept_id(std::string_view text) {
  std::string id;
  for (char c : text) {
    if (c >= 'A' && c <= 'Z')
      id += static_cast<char>(c - 'A' + 'a');
    else if ((c >= 'a' && c <= 'z') || (c >= '0' && c <= '9'))
      id += c;
    else if (!id.empty() && id.back() != '-')
      id += '-';
  }
  return id.empty() ? "x" : id;
}

std::vector<std::size_t> picked(std::size_t count, std::size_t most) {
  std::vector<std::size_t> rows;
  if (count <= most) {
    for (std::size_t k = 0; k < count; ++k) rows.push_back(k);
    return rows;
  }
  for (std::size_t k = 0; k < most; ++k) rows.push_back((k * (count - 1) + (most - 1) / 2) / (most - 1));
  return rows;
}

void PageBuilder::table(const PageTable& page) {
  const ResultTable& table = page.table;
  if (table.rows.empty()) return;
  const std::vector<ColumnLook> looks = looks_of(table);
  const std::string name = table.heading.empty() ? "Numbers of the chart" : table.heading;
  body_ += fmt::format("<div class=\"scroll{}\" tabindex=\"0\" role=\"region\" aria-label=\"{}\">\n<table class=\"data{}\" data-table=\"{}\">\n",
                       page.tall ? " tall" : "", escaped(name),
                       page.searchable ? " sortable searchable"
                       : page.sortable ? " sortable"
                                       : "",
                       escaped(table.name));
  if (!table.heading.empty()) body_ += "<caption>" + escaped(table.heading) + "</caption>\n";
  body_ += "<thead><tr>";
  for (std::size_t k = 0; k < table.columns.size(); ++k)
    body_ +=
        fmt::format("<th scope=\"col\"{}>{}{}</th>", looks[k].numeric ? " class=\"n\"" : "", header_html(table.columns[k].header),
                    table.columns[k].unit.empty() || table.columns[k].unit == "1" ? "" : "<small>" + escaped(table.columns[k].unit) + "</small>");
  body_ += "</tr></thead>\n<tbody>\n";
  for (std::size_t row : picked(table.rows.size(), page.most)) {
    body_ += "<tr>";
    for (std::size_t k = 0; k < table.columns.size(); ++k) body_ += cell_html(page, row, k, looks[k]);
    body_ += "</tr>\n";
  }
  body_ += "</tbody></table></div>\n";
  if (!table.note.empty()) paragraph(table.note, "note");
  if (table.rows.size() > page.most)
    paragraph(fmt::format("{} of {} rows, evenly picked; the results file holds them all.", page.most, table.rows.size()), "note");
}

}  // namespace leat
