#include "tools/leat/say.hpp"

#include <fmt/format.h>
#include <fmt/ranges.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstdio>
#include <cstring>

#include "models/core/nearest.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

const char* const line_end = "\r\n";  // of CSV, RFC 4180

TextTableWriter writer_of(const ResultTable& table, std::size_t most_rows) {
  TextTableWriter writer(table.columns, table.digits);
  const std::size_t rows = table.rows.size(), shown = most_rows > 1 ? std::min(rows, most_rows) : rows;
  for (std::size_t k = 0; k < shown; ++k) writer.add_row(table.rows[shown == rows ? k : k * (rows - 1) / (shown - 1)]);
  return writer;
}

std::string table_text(const ResultTable& table) {
  const std::size_t most = table.terminal_rows > 0 ? static_cast<std::size_t>(table.terminal_rows) : table.rows.size();
  std::string heading = table.heading;
  if (most < table.rows.size()) heading += fmt::format(" ({} of {} rows)", most, table.rows.size());
  return fmt::format("{}{}{}{}", heading.empty() ? "" : heading + "\n", writer_of(table, most).to_string(), table.note, table.note.empty() ? "" : "\n");
}

std::string csv_text(const Answer& answer, const std::string& name) {
  std::string text;
  for (const ResultTable& table : answer.tables) {
    if (name == table.name) return writer_of(table, 0).to_csv();
    if (name == "all")
      text += fmt::format("{}# {}: {}{}{}", text.empty() ? "" : line_end, table.name, table.heading, line_end, writer_of(table, 0).to_csv());
  }
  return text;
}

void tell_people(const Answer& answer, const Manner& manner) {
  for (const Diagnostic& caution : answer.remarks) tell("caution: {}\n", to_string(caution));
  for (const Diagnostic& fault : answer.faults) tell("{}\n", to_string(fault));
  if (!answer.faults.empty())
    tell("{}: {} fault{}; nothing was calculated or written\n", answer.file, answer.faults.size(), answer.faults.size() == 1 ? "" : "s");
  if (!answer.failure.empty()) tell("{}{}{}\n", answer.file, answer.file.empty() ? "" : ": ", answer.failure);
  if (manner.csv.empty()) return;
  for (const std::string& caution : answer.cautions) tell("caution: {}\n", caution);
}

}  // namespace

void tell_text(const std::string& text) {
  for (std::size_t done = 0; done < text.size();) {
    const ssize_t count = write(STDERR_FILENO, text.data() + done, text.size() - done);
    if (count < 0 && errno != EINTR) return;  // nobody is left to be told
    if (count > 0) done += static_cast<std::size_t>(count);
  }
}

std::string answer_text(const Answer& answer) {
  if (answer.lines.empty() && answer.tables.empty()) return {};
  std::string text = answer.title.empty() ? "" : answer.title + "\n";
  if (!answer.lines.empty()) text += fmt::format("{}{}\n", text.empty() ? "" : "\n", fmt::join(answer.lines, "\n"));
  for (const ResultTable& table : answer.tables)
    if (!table.rows.empty()) text += (text.empty() ? "" : "\n") + table_text(table);
  if (!answer.cautions.empty()) text += fmt::format("\nCautions\n  {}\n", fmt::join(answer.cautions, "\n  "));
  if (!answer.written.empty()) text += '\n';
  for (const auto& [what, path] : answer.written)
    text += fmt::format("Written to {} ({})\n", path, what == "results" ? "HDF5, also netCDF-4; variables in outputs/README.md" : what);
  if (!answer.closing.empty()) text += "\n" + answer.closing + "\n";
  return text;
}

int put_out(const std::string& text, int exit_code) {
  std::size_t done = 0;
  while (done < text.size()) {
    const ssize_t count = write(STDOUT_FILENO, text.data() + done, text.size() - done);
    if (count >= 0) {
      done += static_cast<std::size_t>(count);
    } else if (errno == EPIPE) {
      return exit_code;  // the reader has seen enough
    } else if (errno != EINTR) {
      tell("stdout: not written: {}\n", std::strerror(errno));
      return Exit::machine_trouble;
    }
  }
  return exit_code;
}

int say(const Answer& answer, const Manner& manner) {
  tell_people(answer, manner);
  if (manner.json) return put_out(to_json(answer, program_name()) + "\n", answer.exit_code);
  if (!manner.csv.empty()) return put_out(csv_text(answer, manner.csv), answer.exit_code);
  return put_out(answer_text(answer), answer.exit_code);
}

bool knows_csv(const Manner& manner, const std::vector<std::string>& names, Answer& answer) {
  if (manner.csv.empty() || manner.csv == "all" || std::find(names.begin(), names.end(), manner.csv) != names.end()) return true;
  const std::string hint = did_you_mean(manner.csv, names);  // ends with a question mark
  answer.exit_code = Exit::usage;
  answer.failure = fmt::format("--csv {}: no table of that name{}{} there is {}, and all", manner.csv, hint, hint.empty() ? ";" : "", fmt::join(names, ", "));
  return false;
}

bool take_findings(const Diagnostics& diagnostics, Answer& answer) {
  const std::vector<Diagnostic> faults = diagnostics.sorted_faults(), cautions = diagnostics.sorted_cautions();
  answer.faults.insert(answer.faults.end(), faults.begin(), faults.end());
  answer.remarks.insert(answer.remarks.end(), cautions.begin(), cautions.end());
  if (!faults.empty()) answer.exit_code = Exit::input_faults;
  return faults.empty();
}

Progress::Progress(std::string what) : what_(std::move(what)), terminal_(isatty(STDERR_FILENO) != 0) {}

Progress::~Progress() {
  if (shown_) tell("\n");
}

void Progress::show(double share) { say(fmt::format("{:3.0f} %", 100 * share)); }

void Progress::say(const std::string& text) {
  if (!terminal_) return;
  shown_ = true;
  tell("\r{} {}", what_, text);
}

}  // namespace leat
