// case_table: a table of cases in CSV (RFC 4180): a header, then a case a row. Cells may stand in double quotes, which double
// inside; lines end with a line feed, with or without a carriage return; a byte-order mark is skipped, and so are empty lines.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "models/core/diagnostics.hpp"

namespace leat {

struct TableCell {
  std::string text;  // without quotes; blanks around a cell without quotes are cut
  int line = 0;      // from 1
  int column = 0;    // from 1, in characters
};

struct CaseTable {
  std::vector<TableCell> header;
  std::vector<std::vector<TableCell>> rows;  // each as long as the header
};

// Nothing, with faults, if it cannot be used. The first faults are told, and how many there are more.
std::optional<CaseTable> read_case_table(std::string_view text, const std::string& file, Diagnostics& diagnostics);

}  // namespace leat
