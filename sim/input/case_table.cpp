#include "sim/input/case_table.hpp"

#include <fmt/format.h>

#include "sim/input/case_text.hpp"
#include "sim/input/scalar_text.hpp"
#include "sim/input/study_reader.hpp"
#include "sim/input/yaml_text.hpp"

namespace leat {
namespace {

constexpr std::size_t most_faults = 20;  // told one by one

class TableReader {
 public:
  TableReader(std::string_view text, const std::string& file, Diagnostics& diagnostics) : text_(text), file_(file), diagnostics_(diagnostics) {
    if (text_.starts_with("\xEF\xBB\xBF")) text_.remove_prefix(3);
  }

  std::optional<CaseTable> read() {
    CaseTable table;
    while (at_ < text_.size()) {
      std::vector<TableCell> row;
      if (!one_row(row)) return std::nullopt;
      const bool empty = row.size() == 1 && row[0].text.empty();
      if (empty) continue;
      if (table.header.empty()) {
        table.header = std::move(row);
        const TableCell& first = table.header[0];
        if (first.text.find(';') == std::string::npos) continue;
        fault({first.line, first.column}, "a ';' in the header; cells are parted by commas");
        return std::nullopt;
      }
      if (fits(row, table.header)) table.rows.push_back(std::move(row));
      if (table.rows.size() > most_cases) {
        fault({line_, 1}, fmt::format("the table has more than {} rows; split it", most_cases));
        break;
      }
    }
    if (table.header.empty()) fault({1, 1}, "the table is empty; write a header of paths, such as streams.wash.rate, and a case a row");
    else if (table.rows.empty() && faults_ == 0) fault({line_, 1}, "the table has a header and no row; write a case a row below it");
    if (faults_ > most_faults)
      diagnostics_.fault(Code::bad_quantity, {file_, line_ + 1, 1, ""}, fmt::format("and {} more faults in this table", faults_ - most_faults));
    return faults_ == 0 ? std::optional(std::move(table)) : std::nullopt;
  }

 private:
  struct Spot {
    int line = 1, column = 1;
  };

  void fault(Spot spot, std::string why) {
    if (++faults_ <= most_faults) diagnostics_.fault(Code::bad_quantity, {file_, spot.line, spot.column, ""}, std::move(why));
  }

  bool fits(const std::vector<TableCell>& row, const std::vector<TableCell>& header) {
    if (row.size() != header.size()) {
      fault({row[0].line, row[0].column}, fmt::format("{} cell{} in this row; the header has {}", row.size(), row.size() == 1 ? "" : "s", header.size()));
      return false;
    }
    for (std::size_t k = 0; k < row.size(); ++k)
      if (row[k].text.empty()) fault({row[k].line, row[k].column}, fmt::format("an empty cell under '{}'; write its value", shown_text(header[k].text)));
    return true;
  }

  char next() const { return at_ < text_.size() ? text_[at_] : '\n'; }
  bool at_end_of_row() const { return at_ >= text_.size() || next() == '\n' || (next() == '\r' && (at_ + 1 >= text_.size() || text_[at_ + 1] == '\n')); }

  // One character on; false, with a fault, when it is none or cannot be seen.
  bool step(std::string& cell) {
    char32_t point = 0;
    const std::size_t length = character_length(text_.substr(at_), point);
    const std::string why = length == 0 ? "the table is not UTF-8; save it in that encoding" : character_fault(point, text_.substr(at_ + length));
    if (!why.empty()) return fault({line_, column_}, why), false;
    cell.append(text_.substr(at_, length));
    at_ += length;
    ++column_;
    if (point == '\n') ++line_, column_ = 1;
    return true;
  }

  // False when reading on makes no sense.
  bool one_row(std::vector<TableCell>& row) {
    std::string unused;
    while (true) {
      TableCell cell;
      while (next() == ' ' && !at_end_of_row())
        if (!step(unused)) return false;
      cell.line = line_;
      cell.column = column_;
      if (!(next() == '"' ? quoted(cell) : plain(cell))) return false;
      row.push_back(std::move(cell));
      if (at_end_of_row()) break;
      ++at_, ++column_;  // the comma
    }
    while (at_ < text_.size() && next() != '\n') ++at_;
    ++at_, ++line_, column_ = 1;
    return true;
  }

  bool plain(TableCell& cell) {
    while (!at_end_of_row() && next() != ',') {
      if (next() == '"') {
        fault({line_, column_}, "a quote inside a cell; put the whole cell in quotes and double the quote in it");
        return false;
      }
      if (!step(cell.text)) return false;
    }
    cell.text.erase(cell.text.find_last_not_of(' ') + 1);
    return true;
  }

  bool quoted(TableCell& cell) {
    const Spot start{line_, column_};
    ++at_, ++column_;
    while (true) {
      if (at_ >= text_.size()) return fault(start, "the quote opened here is never closed"), false;
      if (next() == '"') {
        ++at_, ++column_;
        if (at_ >= text_.size() || next() != '"') break;
      }
      if (!step(cell.text)) return false;
    }
    while (next() == ' ' && at_ < text_.size()) ++at_, ++column_;
    if (!at_end_of_row() && next() != ',') return fault({line_, column_}, "text behind a closing quote; a quote inside a cell is doubled"), false;
    return true;
  }

  std::string_view text_;
  const std::string& file_;
  Diagnostics& diagnostics_;
  std::size_t at_ = 0;  // [byte]
  int line_ = 1, column_ = 1;
  std::size_t faults_ = 0;
};

}  // namespace

std::optional<CaseTable> read_case_table(std::string_view text, const std::string& file, Diagnostics& diagnostics) {
  return TableReader(text, file, diagnostics).read();
}

}  // namespace leat
