#include "sim/results/table_text.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <cstddef>
#include <cstdlib>
#include <utility>

#include "models/core/check.hpp"
#include "sim/results/utf8.hpp"

namespace leat {
namespace {

constexpr const char* csv_line_end = "\r\n";

std::string shortest(double value) {
  std::array<char, 32> text;
  const auto end = std::to_chars(text.data(), text.data() + text.size(), value).ptr;
  return {text.data(), end};
}

// A tab, line break or escape in a cell would break the table or steer the terminal.
std::string one_line(std::string text) {
  for (char& c : text)
    if (static_cast<unsigned char>(c) < 0x20 || c == 0x7F) c = ' ';
  return text;
}

std::string csv_field(const std::string& text) {
  if (text.find_first_of(",\"\r\n") == std::string::npos) return text;
  std::string quoted = "\"";
  for (char c : text) quoted += c == '"' ? std::string("\"\"") : std::string(1, c);
  return quoted + '"';
}

std::string shown(double value, const TableColumn& column, int digits) {
  if (column.decimals < 0 || !std::isfinite(value)) return significant(value, digits);
  std::array<char, 400> text;
  const auto end = std::to_chars(text.data(), text.data() + text.size(), value, std::chars_format::fixed, column.decimals).ptr;
  return {text.data(), end};
}

struct Layout {
  std::vector<int> widths;
  std::vector<bool> right;
};

void add_line(std::string& out, const std::vector<std::string>& cells, const Layout& layout) {
  std::string line;
  for (std::size_t i = 0; i < cells.size(); ++i) {
    const std::string padding(static_cast<std::size_t>(layout.widths[i] - display_width(cells[i])), ' ');
    if (i > 0) line += "  ";
    line += layout.right[i] ? padding + cells[i] : cells[i] + padding;
  }
  line.erase(line.find_last_not_of(' ') + 1);
  out += line + '\n';
}

}  // namespace

std::string significant(double value, int digits) {
  check(digits >= 1 && digits <= 17, "significant: 1 to 17 digits");
  if (std::isnan(value)) return "-";
  if (std::isinf(value)) return value < 0 ? "-inf" : "inf";
  if (value == 0) return "0";

  // "d.ddde-05": round first, then place the point, so that 9.9996 becomes 10.00 and not 10.000.
  std::array<char, 40> buffer;
  const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), std::abs(value),
                                 std::chars_format::scientific, digits - 1);
  const std::string scientific(buffer.data(), end.ptr);
  const std::string sign = value < 0 ? "-" : "";
  const std::size_t mark = scientific.find('e');
  const int exponent = std::atoi(scientific.c_str() + mark + 1);
  if (exponent < -4 || exponent >= 7) return sign + scientific;

  std::string figures = scientific.substr(0, mark);
  std::erase(figures, '.');
  if (exponent < 0) return sign + "0." + std::string(static_cast<std::size_t>(-exponent - 1), '0') + figures;
  const std::size_t whole = static_cast<std::size_t>(exponent) + 1;
  if (figures.size() <= whole) return sign + figures + std::string(whole - figures.size(), '0');
  return sign + figures.substr(0, whole) + '.' + figures.substr(whole);
}

TextTableWriter::TextTableWriter(std::vector<TableColumn> columns, int digits)
    : columns_(std::move(columns)), digits_(digits) {
  check(!columns_.empty(), "a table needs a column");
}

void TextTableWriter::add_row(std::vector<Cell> cells) {
  check(cells.size() == columns_.size(), "a row needs one cell for each column of its table");
  rows_.push_back(std::move(cells));
}

std::string TextTableWriter::to_string() const {
  std::vector<std::vector<std::string>> lines(2);
  bool any_unit = false;
  for (const TableColumn& column : columns_) {
    lines[0].push_back(one_line(column.header));
    lines[1].push_back(one_line(column.unit));
    any_unit = any_unit || !column.unit.empty();
  }
  if (!any_unit) lines.pop_back();
  const std::size_t head = lines.size();

  Layout layout{std::vector<int>(columns_.size(), 0), std::vector<bool>(columns_.size(), false)};
  for (const auto& row : rows_) {
    std::vector<std::string>& line = lines.emplace_back();
    for (std::size_t i = 0; i < row.size(); ++i) {
      const double* number = std::get_if<double>(&row[i]);
      if (number) layout.right[i] = true;
      line.push_back(number ? shown(*number, columns_[i], digits_) : one_line(std::get<std::string>(row[i])));
    }
  }
  for (const auto& line : lines)
    for (std::size_t i = 0; i < line.size(); ++i) layout.widths[i] = std::max(layout.widths[i], display_width(line[i]));

  std::vector<std::string> rule;
  for (int width : layout.widths) rule.emplace_back(static_cast<std::size_t>(width), '-');
  lines.insert(lines.begin() + static_cast<std::ptrdiff_t>(head), rule);

  std::string out;
  for (const auto& line : lines) add_line(out, line, layout);
  return out;
}

std::string TextTableWriter::to_csv() const {
  std::string out;
  for (std::size_t i = 0; i < columns_.size(); ++i) {
    const TableColumn& column = columns_[i];
    if (i > 0) out += ',';
    out += csv_field(column.unit.empty() ? column.header : column.header + " [" + column.unit + "]");
  }
  out += csv_line_end;
  for (const auto& row : rows_) {
    for (std::size_t i = 0; i < row.size(); ++i) {
      if (i > 0) out += ',';
      const double* number = std::get_if<double>(&row[i]);
      if (!number) out += csv_field(std::get<std::string>(row[i]));
      else if (!std::isnan(*number)) out += shortest(*number);
    }
    out += csv_line_end;
  }
  return out;
}

}  // namespace leat
