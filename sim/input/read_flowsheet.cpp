#include "sim/input/read_flowsheet.hpp"

#include <fmt/format.h>

#include "sim/input/file_kinds.hpp"
#include "sim/input/read_flowsheet_parts.hpp"

namespace leat {
namespace {

constexpr double lowest_site = -500, highest_site = 6000;  // altitude [m]
constexpr double shortest_time = 1e-3;                     // of a history [s]

}  // namespace

void FlowsheetReader::read(const YamlNode& root, Flowsheet& flowsheet) {
  static const std::vector<std::string> keys = {"leat",     "kind",    "title",   "site",   "chemistry",       "liquors", "solids",
                                                "leaching", "reagents", "streams", "circuit", "leaves", "pregnant_liquor", "metals", "history"};
  flowsheet_ = &flowsheet;
  flowsheet.place = root.place;
  if (!typed_.is_map(root)) return;
  if (!head(root, "flowsheet", flowsheet.title)) return;
  typed_.only_keys(root, keys);
  liquor_names_ = keys_of(root.find("liquors"));
  solids_names_ = keys_of(root.find("solids"));
  reagent_names_ = keys_of(root.find("reagents"));
  stream_names_ = keys_of(root.find("streams"));
  const auto section = [&](const char* key, auto&& take) {
    const YamlNode* map = root.find(key);
    if (map && typed_.is_map(*map))
      for (const YamlNode::Entry& entry : map->entries) take(entry);
  };
  if (const YamlNode* map = root.find("site")) site(*map);
  if (const YamlNode* map = root.find("chemistry")) flowsheet.chemistry = chemistry(*map);
  if (const YamlNode* map = root.find("liquors")) liquors(*map);
  section("solids", [&](const auto& entry) { flowsheet.solids.push_back(solids(entry)); });
  section("leaching", [&](const auto& entry) { flowsheet.leaching.push_back(leaching(entry)); });
  section("reagents", [&](const auto& entry) { flowsheet.reagents.push_back(reagent(entry)); });
  if (typed_.required(root, "streams")) section("streams", [&](const auto& entry) { flowsheet.streams.push_back(stream(entry)); });
  if (typed_.required(root, "circuit")) section("circuit", [&](const auto& entry) { flowsheet.units.push_back(unit(entry)); });
  if (const YamlNode* map = root.find("leaves")) leaves(*map);
  if (const YamlNode* node = typed_.required(root, "pregnant_liquor")) {
    flowsheet.pregnant_liquor = typed_.text(*node).value_or("");
    flowsheet.pregnant_place = node->place;
  }
  if (const YamlNode* node = root.find("metals")) {
    flowsheet.metals = typed_.text_list(*node);
    flowsheet.metals_place = node->place;
  }
  if (const YamlNode* map = root.find("history")) flowsheet.history = history(*map);
}

void FlowsheetReader::site(const YamlNode& map) {
  static const std::vector<std::string> keys = {"altitude", "air_temperature"};
  if (!typed_.is_map(map)) return;
  typed_.only_keys(map, keys);
  if (const YamlNode* node = map.find("altitude")) flowsheet_->altitude = typed_.quantity(*node, "m", lowest_site, highest_site).value_or(0);
  if (const YamlNode* node = map.find("air_temperature")) flowsheet_->air_temperature = temperature(*node);
}

void FlowsheetReader::leaves(const YamlNode& map) {
  if (!typed_.is_map(map)) return;
  for (const YamlNode::Entry& entry : map.entries) {
    own_name(entry);
    if (const auto stream = typed_.text(entry.value)) flowsheet_->leaves.push_back({entry.key, *stream, entry.value.place});
  }
}

HistorySpec FlowsheetReader::history(const YamlNode& map) {
  static const std::vector<std::string> keys = {"start", "until", "every"};
  HistorySpec read;
  read.place = map.place;
  if (!typed_.is_map(map)) return read;
  typed_.only_keys(map, keys);
  if (const YamlNode* node = typed_.required(map, "start")) start(*node, read);
  const YamlNode* until = typed_.required(map, "until");
  const YamlNode* every = typed_.required(map, "every");
  if (until) read.until = typed_.quantity(*until, "s", shortest_time).value_or(0);
  if (every) read.every = typed_.quantity(*every, "s", shortest_time).value_or(0);
  if (read.until > 0 && read.every > read.until)
    fault(Code::out_of_range, every->place, fmt::format("{} is longer than the whole history of {}", in_quotes(every->text), in_quotes(until->text)));
  constexpr double most_rows = 100000;
  if (read.every > 0 && read.until / read.every > most_rows)
    fault(Code::out_of_range, every->place, fmt::format("{} stores {:.3g} rows; write a longer step, {:.0f} rows are the most", in_quotes(every->text), read.until / read.every, most_rows));
  return read;
}

void FlowsheetReader::start(const YamlNode& node, HistorySpec& history) {
  if (node.is_scalar() && node.text == "steady") {
    history.from_steady = true;
  } else if (node.is_scalar()) {
    history.fillings.push_back({"all", liquor(node)});
  } else if (typed_.is_map(node)) {
    for (const YamlNode::Entry& entry : node.entries) history.fillings.push_back({entry.key, liquor(entry.value)});
    if (node.entries.empty()) fault(Code::missing_key, node.place, "the start names no unit; write steady, a liquor, or {all: water}");
  }
}

std::optional<Flowsheet> read_flowsheet(std::string_view text, const std::string& file, const Catalogue& catalogue, Diagnostics& diagnostics) {
  const std::optional<YamlNode> root = read_yaml(text, file, diagnostics);
  if (!root) return std::nullopt;
  Flowsheet flowsheet;
  flowsheet.file = file;
  flowsheet.text = text;
  FlowsheetReader(catalogue, diagnostics).read(*root, flowsheet);
  return flowsheet;
}

std::string file_kind(std::string_view text, const std::string& file, Diagnostics& diagnostics) {
  const std::optional<YamlNode> root = read_yaml(text, file, diagnostics);
  TypedReader typed(diagnostics);
  if (!root || !typed.is_map(*root)) return "";
  const YamlNode* version = typed.required(*root, "leat");
  const YamlNode* kind = typed.required(*root, "kind");
  const bool readable = version && typed.whole_number(*version, 1, 1);
  const auto word = kind ? typed.choice(*kind, file_kinds()) : std::nullopt;
  return readable && word ? *word : "";
}

}  // namespace leat
