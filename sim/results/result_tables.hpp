// result_tables: the tables a person reads, made from a results file's content alone. The terminal, CSV, JSON and the
// page all show these, so that a number stands in one place only.
#pragma once

#include <string>
#include <vector>

#include "sim/results/result_set.hpp"
#include "sim/results/table_text.hpp"

namespace leat {

struct ResultTable {
  std::string name;     // one word: streams, stages, recovery ...; what --csv takes and what the page links to
  std::string heading;  // with what it is of, e.g. "Streams at steady state (metals dissolved in the liquor)"
  std::vector<TableColumn> columns;
  std::vector<std::vector<TextTableWriter::Cell>> rows;
  std::string note;     // shown below; may be empty
  int digits = 4;       // significant, on the terminal and the page; CSV and JSON give all
  int terminal_rows = 0;  // at most so many, evenly spaced, on the terminal; 0: all
};

// All tables of a run, a beaker or a ladder (attribute leat_kind), in the order in which they are shown. One without rows has
// nothing to say in this case (the history of a run without one): the terminal and the page leave it out.
// std::logic_error for another kind.
std::vector<ResultTable> tables_of(const ResultSet& results);

// Names that tables_of may give for a kind, in order: run, beaker, ladder, campaign.
std::vector<std::string> table_names(const std::string& kind);

}  // namespace leat
