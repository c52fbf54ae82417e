#include <nlohmann/json.hpp>

#include <array>
#include <string_view>

#include "sim/results/answer.hpp"

namespace leat {
namespace {

using Json = nlohmann::ordered_json;

// By exit code (README, "Exit codes").
constexpr std::array<std::string_view, 6> status_words = {"done", "usage", "input_faults", "not_solved", "machine_trouble", "own_bug"};

Json json_of(const ResultTable& table) {
  Json columns = Json::array(), rows = Json::array();
  for (const TableColumn& column : table.columns) columns.push_back({{"name", column.header}, {"unit", column.unit}});
  for (const auto& row : table.rows) {
    Json cells = Json::array();
    for (const TextTableWriter::Cell& cell : row) std::visit([&](const auto& value) { cells.push_back(value); }, cell);
    rows.push_back(std::move(cells));
  }
  return {{"heading", table.heading}, {"columns", std::move(columns)}, {"rows", std::move(rows)}, {"note", table.note}};
}

Json json_of(const std::vector<Diagnostic>& findings) {
  Json list = Json::array();
  for (const Diagnostic& one : findings)
    list.push_back({{"file", one.place.file}, {"line", one.place.line}, {"column", one.place.column}, {"key", one.place.key},
                    {"code", std::string(code_name(one.code))}, {"message", one.text}});
  return list;
}

}  // namespace

std::string to_json(const Answer& answer, const std::string& program) {
  const bool known = answer.exit_code >= 0 && answer.exit_code < static_cast<int>(status_words.size());
  Json tables = Json::object(), written = Json::object();
  for (const ResultTable& table : answer.tables) tables[table.name] = json_of(table);
  for (const auto& [what, path] : answer.written) written[what] = path;
  Json object = Json::object();
  object["program"] = program;
  object["verb"] = answer.verb;
  object["file"] = answer.file;
  object["title"] = answer.title;
  object["status"] = known ? std::string(status_words[static_cast<std::size_t>(answer.exit_code)]) : "own_bug";
  object["exit_code"] = answer.exit_code;
  object["lines"] = answer.lines;
  object["tables"] = std::move(tables);
  object["cautions"] = answer.cautions;
  object["faults"] = json_of(answer.faults);
  object["remarks"] = json_of(answer.remarks);
  object["failure"] = answer.failure;
  object["written"] = std::move(written);
  object["closing"] = answer.closing;
  return object.dump(-1, ' ', false, Json::error_handler_t::replace);  // NaN and infinities as null, bad bytes as U+FFFD
}

}  // namespace leat
