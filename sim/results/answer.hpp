// Answer: what a verb has to say, before it is said as text, JSON or CSV.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "models/core/diagnostics.hpp"
#include "sim/results/result_tables.hpp"

namespace leat {

struct Answer {
  std::string verb, file, title;
  int exit_code = 0;                         // that the command ends with
  std::vector<std::string> lines;            // said before the tables
  std::vector<ResultTable> tables;
  std::vector<std::string> cautions;         // a line each
  std::vector<Diagnostic> faults;            // of the input
  std::vector<Diagnostic> remarks;           // cautions about the input, with their places
  std::string failure;                       // why it is not done; empty if it is
  std::vector<std::pair<std::string, std::string>> written;  // what, path
  std::string closing;                       // said last; may be empty
};

// One JSON object (RFC 8259), numbers in full, NaN as null:
//   {"program", "verb", "file", "title", "status", "exit_code", "lines": [...],
//    "tables": {NAME: {"heading", "columns": [{"name", "unit"}], "rows": [[...]], "note"}},
//    "cautions": [...], "faults": [{"file", "line", "column", "key", "code", "message"}], "remarks": [the same], "failure",
//    "written": {WHAT: PATH}, "closing"}
// status: a word for the exit code: done, usage, input_faults, not_solved, machine_trouble, own_bug.
std::string to_json(const Answer& answer, const std::string& program);

}  // namespace leat
