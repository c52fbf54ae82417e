#include <fmt/format.h>

#include <algorithm>
#include <charconv>

#include "models/core/nearest.hpp"
#include "sim/input/read_flowsheet_parts.hpp"

namespace leat {
namespace {

constexpr long most_members = 200;       // of an expansion [1]
constexpr double fastest_transfer = 10;  // kla [1/s]
constexpr double rounding = 1e-11;       // that shares may sum to over a whole [1]

const AmountForm outlet_form{"a share or a volume flow", "10 % or 12 m3/h", {"1", "m3/s"}, true, false};

std::vector<std::string> kind_names(const Catalogue& catalogue) {
  std::vector<std::string> names;
  for (const auto& [name, kind] : catalogue.units) names.push_back(name);
  for (const auto& [name, expansion] : catalogue.expansions) names.push_back(name);
  return names;
}

}  // namespace

UnitSpec FlowsheetReader::unit(const YamlNode::Entry& entry) {
  UnitSpec read;
  read.name = entry.key;
  read.place = read.kind_place = entry.key_place;
  own_name(entry);
  if (std::find(stream_names_.begin(), stream_names_.end(), entry.key) != stream_names_.end())
    fault(Code::duplicate, entry.key_place, fmt::format("{} names a stream already; a unit needs a name of its own", in_quotes(entry.key)));
  if (entry.key == "all") fault(Code::duplicate, entry.key_place, "'all' stands for every vessel and cannot name a unit");
  const YamlNode& map = entry.value;
  if (!typed_.is_map(map)) return read;
  if (const YamlNode* node = typed_.required(map, "takes")) read.takes = takes(*node);
  const YamlNode* kind_node = typed_.required(map, "unit");
  if (!kind_node) return read;
  read.kind_place = kind_node->place;
  read.kind = typed_.choice(*kind_node, kind_names(catalogue_)).value_or("");
  if (read.kind.empty()) return read;
  const auto expanded = catalogue_.expansions.find(read.kind);
  const UnitExpansion* expansion = expanded == catalogue_.expansions.end() ? nullptr : &expanded->second;
  const UnitKind& kind = catalogue_.units.at(expansion ? expansion->unit : read.kind);
  const std::vector<std::string> keys = unit_keys(kind, expansion);
  if (kind.named_outlets)
    outlets(map, keys, read);
  else
    typed_.only_keys(map, keys);
  if (expansion) members(map, *expansion, read);
  parameters(map, kind, read);
  if (const YamlNode* node = map.find("temperature"))
    read.temperature = temperature(*node);
  else if (kind.needs_temperature)
    fault(Code::missing_key, read.place, fmt::format("{} needs its temperature; write for example temperature: 25 degC", in_quotes(read.name)));
  const YamlNode* contact = map.find("gas");
  if (contact && kind.takes_gas) read.gas = gas(*contact);
  return read;
}

std::vector<std::string> FlowsheetReader::unit_keys(const UnitKind& kind, const UnitExpansion* expansion) const {
  std::vector<std::string> keys = {"unit", "takes"};
  if (expansion) keys.push_back(expansion->count);
  for (const ParameterSpec& spec : kind.parameters) keys.push_back(spec.name);
  keys.push_back("temperature");
  if (kind.takes_gas) keys.push_back("gas");
  if (expansion) keys.push_back("also_takes");
  return keys;
}

FlowsheetReader::Takes FlowsheetReader::takes(const YamlNode& node) {
  Takes read;
  const auto take = [&](const YamlNode& item) {
    const auto name = typed_.text(item);
    if (!name) return;
    if (std::any_of(read.begin(), read.end(), [&](const auto& one) { return one.first == *name; }))
      fault(Code::duplicate, item.place, in_quotes(*name) + " is taken twice here");
    else
      read.emplace_back(*name, item.place);
  };
  if (node.is_map()) {
    fault(Code::wrong_kind, node.place, "a map stands here; the name of a stream or a list of names is needed, such as [feed, S.recycle]");
  } else if (node.is_list()) {
    for (const YamlNode& item : node.items) take(item);
    if (node.items.empty()) fault(Code::missing_key, node.place, "the list names no stream; a unit takes at least one");
  } else {
    take(node);
  }
  return read;
}

// How many members an expansion has, and what single ones take besides.
void FlowsheetReader::members(const YamlNode& map, const UnitExpansion& expansion, UnitSpec& unit) {
  long count = most_members;
  if (const YamlNode* node = typed_.required(map, expansion.count)) {
    const auto read = typed_.whole_number(*node, 1, most_members);
    count = read.value_or(most_members);
    unit.count = static_cast<int>(read.value_or(1));
  }
  const YamlNode* also = map.find("also_takes");
  if (!also || !typed_.is_map(*also)) return;
  for (const YamlNode::Entry& entry : also->entries) {
    const std::string& key = entry.key;
    long member = 0;
    const auto [end, error] = std::from_chars(key.data(), key.data() + key.size(), member);
    const bool whole = error == std::errc() && end == key.data() + key.size() && std::to_string(member) == key;
    if (!whole || member < 1 || member > count)
      fault(Code::out_of_range, entry.key_place, fmt::format("{} is not the number of a member of {}; allowed is 1 to {}", in_quotes(key), unit.name, count));
    else
      unit.member_takes[static_cast<int>(member)] = takes(entry.value);
  }
}

void FlowsheetReader::parameters(const YamlNode& map, const UnitKind& kind, UnitSpec& unit) {
  for (const ParameterSpec& spec : kind.parameters) {
    const YamlNode* node = map.find(spec.name);
    if (node) {
      if (const auto value = parameter(*node, spec)) unit.parameters[spec.name] = *value;
    } else if (spec.required) {
      fault(Code::missing_key, unit.place,
            fmt::format("{}: a {} needs its {}, the {}; write for example {}: {}", in_quotes(unit.name), unit.kind, spec.name, spec.meaning, spec.name,
                        example_of(spec.unit)));
    }
  }
}

GasSpec FlowsheetReader::gas(const YamlNode& map) {
  static const std::vector<std::string> keys = {"takes", "kla"};
  GasSpec read;
  read.place = map.place;
  if (!typed_.is_map(map)) return read;
  typed_.only_keys(map, keys);
  if (const YamlNode* node = typed_.required(map, "takes")) read.takes = name_among(*node, "a gas stream", gas_names_);
  if (const YamlNode* node = typed_.required(map, "kla")) read.transfer = typed_.quantity(*node, "1/s", 0, fastest_transfer).value_or(0);
  return read;
}

// Every key that is none of the unit's own names an outlet.
void FlowsheetReader::outlets(const YamlNode& map, const std::vector<std::string>& keys, UnitSpec& unit) {
  bool complete = true;
  for (const YamlNode::Entry& entry : map.entries) {
    if (std::find(keys.begin(), keys.end(), entry.key) != keys.end()) continue;
    complete = own_name(entry) && complete;
    if (const auto share = amount(entry.value, outlet_form)) {
      unit.outlets.push_back({entry.key, *share});
      continue;
    }
    complete = false;
    const std::string meant = nearest(entry.key, keys);
    if (!meant.empty())
      fault(Code::unknown_key, entry.key_place, fmt::format("{} is read as the name of an outlet; did you mean '{}'?", in_quotes(entry.key), meant));
  }
  if (complete) close_outlets(unit);
}

void FlowsheetReader::close_outlets(const UnitSpec& unit) {
  double sum = 0;
  int rests = 0;
  for (const OutletSpec& outlet : unit.outlets) {
    if (outlet.share.rest && ++rests > 1)
      fault(Code::does_not_close, outlet.share.place, "'rest' stands here a second time; exactly one outlet takes the rest");
    if (!outlet.share.rest && convertible(outlet.share.quantity.unit, "1")) sum += convert(outlet.share.quantity, "1");
  }
  if (rests == 0)
    fault(Code::does_not_close, unit.place, fmt::format("{} has no outlet for the rest; write for example onward: rest", in_quotes(unit.name)));
  if (sum > 1 + rounding)
    fault(Code::does_not_close, unit.place,
          fmt::format("the shares of the outlets of {} sum to {:.9g} %, more than 100 %", in_quotes(unit.name), 100 * sum));
}

}  // namespace leat
