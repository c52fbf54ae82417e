#include <fmt/format.h>

#include <algorithm>

#include "sim/input/read_flowsheet_parts.hpp"

namespace leat {
namespace {

constexpr double wettest = 0.9;                              // moisture, of the wet mass [1]
constexpr double least_density = 500, most_density = 25000;  // of a solid [kg/m3]
constexpr const char* gangue_phase = "gangue";

const AmountForm mass_flow_form{"a mass flow", "100 t/h", {"kg/s"}, false, false};
const AmountForm any_flow_form{"a mass or volume flow", "12 m3/h or 5 t/h", {"m3/s", "kg/s"}, false, false};

}  // namespace

void FlowsheetReader::liquors(const YamlNode& map) {
  if (!typed_.is_map(map)) return;
  for (const YamlNode::Entry& entry : map.entries) {
    if (entry.key == "water" || entry.key == "steady")
      fault(Code::duplicate, entry.key_place, in_quotes(entry.key) + " has a meaning of its own and cannot name a liquor");
    own_name(entry);
    flowsheet_->liquors[entry.key] = liquor(entry.value);
  }
  for (const YamlNode::Entry& entry : map.entries) {
    const LiquorSpec* at = &flowsheet_->liquors[entry.key];
    std::size_t steps = 0;
    for (; !at->named.empty() && steps <= map.entries.size(); ++steps) at = &flowsheet_->liquors[at->named];
    if (steps > map.entries.size()) fault(Code::unknown_name, entry.value.place, in_quotes(entry.key) + " leads back to itself and never to a composition");
  }
}

SolidsSpec FlowsheetReader::solids(const YamlNode::Entry& entry) {
  static const std::vector<std::string> keys = {"phases", "inert", "moisture", "moisture_liquor", "gangue_density"};
  SolidsSpec read;
  read.name = entry.key;
  read.place = read.moisture_place = entry.key_place;
  own_name(entry);
  const YamlNode& map = entry.value;
  if (!typed_.is_map(map)) return read;
  typed_.only_keys(map, keys);
  if (typed_.required(map, "phases")) {
    const YamlNode::Entry& phases = *find_entry(map, "phases");
    for (NamedAmount& share : closed_shares(phases)) read.phases.push_back({share.name, share.amount});
    if (const YamlNode* inert = map.find("inert")) {
      const std::vector<std::string> known = keys_of(&phases.value);
      read.inert = names(*inert);
      for (const YamlNode& item : inert->items)
        if (item.is_scalar()) name_among(item, "a phase of these solids", known);
      if (inert->is_scalar()) name_among(*inert, "a phase of these solids", known);
    }
  }
  moisture(map, read);
  gangue(map, read);
  return read;
}

void FlowsheetReader::moisture(const YamlNode& map, SolidsSpec& solids) {
  const YamlNode* share = map.find("moisture");
  const YamlNode* of = map.find("moisture_liquor");
  if (share) {
    solids.moisture_place = share->place;
    solids.moisture = typed_.quantity(*share, "1", 0, wettest).value_or(0);
  }
  if (of) solids.moisture_liquor = liquor(*of);
  if (solids.moisture > 0 && !of)
    fault(Code::missing_key, solids.moisture_place, "the moisture needs moisture_liquor: what liquor it is, such as moisture_liquor: water");
  if (of && !share) fault(Code::missing_key, of->place, "moisture_liquor stands here without moisture; write for example moisture: 8 %");
}

void FlowsheetReader::gangue(const YamlNode& map, SolidsSpec& solids) {
  const YamlNode* density = map.find("gangue_density");
  const auto phase = std::find_if(solids.phases.begin(), solids.phases.end(), [](const SolidPhaseSpec& one) { return one.mineral == gangue_phase; });
  if (density) solids.gangue_density = typed_.quantity(*density, "kg/m3", least_density, most_density).value_or(0);
  if (!density && phase != solids.phases.end())
    fault(Code::missing_key, phase->share.place, "the phase gangue needs gangue_density, such as gangue_density: 2.7 t/m3");
  const YamlNode* phases = map.find("phases");
  if (density && phases && phases->is_map() && !phases->find(gangue_phase))
    fault(Code::unknown_key, density->place, "gangue_density stands here, but no phase is named gangue");
}

ReagentSpec FlowsheetReader::reagent(const YamlNode::Entry& entry) {
  static const std::vector<std::string> keys = {"made_of", "counted_as"};
  ReagentSpec read;
  read.name = entry.key;
  read.place = entry.key_place;
  own_name(entry);
  if (!typed_.is_map(entry.value)) return read;
  typed_.only_keys(entry.value, keys);
  if (typed_.required(entry.value, "made_of")) read.made_of = closed_shares(*find_entry(entry.value, "made_of"));
  text_at(entry.value, "counted_as", read.counted_as);
  return read;
}

void FlowsheetReader::rate(const YamlNode& map, const AmountForm& form, StreamSpec& stream) {
  if (const YamlNode* node = typed_.required(map, "rate"))
    if (const auto flow = amount(*node, form)) stream.rate = *flow;
}

StreamSpec FlowsheetReader::stream(const YamlNode::Entry& entry) {
  static const std::vector<std::string> liquor_keys = {"liquor", "rate", "temperature"};
  static const std::vector<std::string> reagent_keys = {"reagent", "rate", "temperature"};
  static const std::vector<std::string> gas_keys = {"gas", "temperature"};
  static const std::vector<std::string> gases = {"air"};
  StreamSpec read;
  read.name = entry.key;
  read.place = entry.key_place;
  own_name(entry);
  const YamlNode& map = entry.value;
  if (!typed_.is_map(map)) return read;
  std::vector<std::string> given;
  for (const char* key : {"solids", "liquor", "reagent", "gas"})
    if (map.find(key)) given.push_back(key);
  const bool pulp = given == std::vector<std::string>{"solids", "liquor"};
  if (given.size() != 1 && !pulp) {
    const std::string found = given.empty() ? "none of them" : fmt::format("{}", fmt::join(given, " and "));
    fault(given.empty() ? Code::missing_key : Code::duplicate, read.place,
          fmt::format("a stream is one of solids, liquor, reagent and gas; {} has {}", in_quotes(read.name), found));
    return read;
  }
  if (const YamlNode* node = map.find("temperature")) read.temperature = temperature(*node);
  if (given[0] == "solids") {
    solids_stream(map, read);
  } else if (given[0] == "liquor") {
    typed_.only_keys(map, liquor_keys);
    read.liquor = liquor(*map.find("liquor"));
    rate(map, any_flow_form, read);
  } else if (given[0] == "reagent") {
    typed_.only_keys(map, reagent_keys);
    read.reagent = name_among(*map.find("reagent"), "a reagent", reagent_names_);
    rate(map, any_flow_form, read);
  } else {
    typed_.only_keys(map, gas_keys);
    read.gas = typed_.choice(*map.find("gas"), gases).has_value();
    gas_names_.push_back(entry.key);
  }
  return read;
}

void FlowsheetReader::solids_stream(const YamlNode& map, StreamSpec& stream) {
  static const std::vector<std::string> keys = {"solids", "rate", "rate_basis", "liquor", "solids_fraction", "temperature"};
  static const std::vector<std::string> bases = {"dry", "wet"};
  typed_.only_keys(map, keys);
  stream.solids = name_among(*map.find("solids"), "solids", solids_names_);
  rate(map, mass_flow_form, stream);
  if (const YamlNode* node = map.find("rate_basis"))
    stream.rate_dry = typed_.choice(*node, bases) == "dry";
  else
    fault(Code::missing_key, stream.place, "a rate of solids needs rate_basis: dry or wet");
  feed_pulp(map, stream);
}

void FlowsheetReader::feed_pulp(const YamlNode& map, StreamSpec& stream) {
  constexpr double least = 1e-3, most = 1;  // solids in a feed pulp [kg/kg]
  const YamlNode* of = map.find("liquor");
  const YamlNode* fraction = map.find("solids_fraction");
  if (of) stream.liquor = liquor(*of);
  if (fraction) stream.solids_fraction = typed_.quantity(*fraction, "1", least, most);
  if (of && !fraction) fault(Code::missing_key, of->place, "solids with a liquor are a feed pulp and need solids_fraction, such as solids_fraction: 45 %");
  if (fraction && !of) fault(Code::missing_key, fraction->place, "solids_fraction needs the liquor that makes up the pulp, such as liquor: water");
  if (!fraction) return;
  for (const SolidsSpec& solids : flowsheet_->solids)
    if (solids.name == stream.solids && solids.moisture > 0)
      fault(Code::duplicate, fraction->place,
            fmt::format("{} has a moisture (line {}); a feed pulp takes all its water from its own liquor, so drop one of the two",
                        in_quotes(solids.name), solids.moisture_place.line));
}

}  // namespace leat
