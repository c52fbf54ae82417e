// table_text: a table for the terminal, and the same table as CSV.
#pragma once

#include <string>
#include <variant>
#include <vector>

namespace leat {

// The value rounded to so many significant digits: 0.8312, 1235000, 4.200e-06. An exponent appears only below 1e-4 and
// from 1e7 on; "-" stands for NaN, "inf" and "-inf" for infinities. digits: 1 to 17.
std::string significant(double value, int digits = 4);

struct TableColumn {
  std::string header;
  std::string unit;   // empty: none
  int decimals = -1;  // of numbers in to_string: so many behind the point; -1: significant digits
};

class TextTableWriter {
 public:
  using Cell = std::variant<std::string, double>;

  explicit TextTableWriter(std::vector<TableColumn> columns, int digits = 4);

  // One cell a column; std::logic_error otherwise.
  void add_row(std::vector<Cell> cells);

  // Header, unit line (when any column has a unit), rule, rows. Columns with a number in them are set to the right,
  // columns of text to the left. Ends with a line break.
  std::string to_string() const;

  // Comma-separated as in RFC 4180, lines ended by CR LF: "header [unit]", numbers in the shortest form that reads back to the
  // same value, NaN empty.
  std::string to_csv() const;

 private:
  std::vector<TableColumn> columns_;
  std::vector<std::vector<Cell>> rows_;
  int digits_;
};

}  // namespace leat
