#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "sim/input/read_flowsheet_parts.hpp"

namespace leat {
namespace {

constexpr double parts_allowance = 1e-6;                  // of the sum of the parts' shares [1]
constexpr double steepest = 10;                           // order of a law, either sign [1]
constexpr const char* from_reference = "at_temperature";  // parameter that is typed under `at`
constexpr const char* energy_parameter = "activation_energy";

const AmountForm reference_form{"a concentration", "0.1 mol/L or 400 mg/L as NaCN", {"mol/m3", "kg/m3"}, false, true};

std::vector<std::string> law_names(const Catalogue& catalogue) {
  std::vector<std::string> names = {inert_law};
  for (const auto& [name, kind] : catalogue.laws) names.push_back(name);
  return names;
}

}  // namespace

// A parameter of a law; of any law where the name is none, or that of no law with parameters.
const ParameterSpec* FlowsheetReader::law_parameter(const std::string& law, const std::string& name) const {
  if (name == from_reference) return nullptr;
  const bool any = !catalogue_.laws.count(law);
  for (const auto& [known, kind] : catalogue_.laws) {
    if (!any && known != law) continue;
    for (const ParameterSpec& spec : kind.parameters)
      if (spec.name == name) return &spec;
  }
  return nullptr;
}

// False for a mistyped law only, whose keys cannot be judged.
bool FlowsheetReader::knows_law(const std::string& law) const { return law.empty() || law == inert_law || catalogue_.laws.count(law) > 0; }

// Keys that an entry with this law may have.
std::vector<std::string> FlowsheetReader::law_keys(const std::string& law) const {
  std::vector<std::string> keys = {"law"};
  if (law == inert_law) return keys;
  const bool any = !catalogue_.laws.count(law);
  for (const auto& [known, kind] : catalogue_.laws) {
    if (!any && known != law) continue;
    for (const ParameterSpec& spec : kind.parameters)
      if (spec.name != from_reference && std::find(keys.begin(), keys.end(), spec.name) == keys.end()) keys.push_back(spec.name);
  }
  for (const char* key : {"to", "at", "orders"}) keys.push_back(key);
  return keys;
}

LeachingSpec FlowsheetReader::leaching(const YamlNode::Entry& entry) {
  LeachingSpec read;
  read.mineral = entry.key;
  read.place = read.oxidant_place = read.law.place = entry.key_place;
  const YamlNode& map = entry.value;
  if (!typed_.is_map(map)) return read;
  const YamlNode::Entry* divided = find_entry(map, "parts");
  if (const YamlNode* node = map.find("law")) read.law.law = law_name(*node);
  std::vector<std::string> keys = law_keys(divided ? "" : read.law.law);  // a part may have any law
  keys.push_back("parts");
  if (divided || read.law.law != inert_law)
    for (const char* key : {"ultimate_extraction", "oxidant", "reductant", "reaction"}) keys.push_back(key);
  if (divided || knows_law(read.law.law)) typed_.only_keys(map, keys);
  law(map, divided ? "" : read.law.law, read.law);
  if (const YamlNode* node = map.find("ultimate_extraction")) {
    read.law.ultimate_extraction = typed_.quantity(*node, "1", 0, 1);
    if (divided) fault(Code::duplicate, node->place, "ultimate_extraction and parts both say what never dissolves; give one of them");
  }
  text_at(map, "oxidant", read.oxidant);
  text_at(map, "reductant", read.reductant);
  text_at(map, "reaction", read.reaction);
  for (const char* key : {"reductant", "oxidant"})
    if (const YamlNode* node = map.find(key)) read.oxidant_place = node->place;
  if (divided)
    parts(*divided, read);
  else
    check_law(read.law, read.mineral);
  return read;
}

// The law as typed, also when it is not known and a fault says so.
std::string FlowsheetReader::law_name(const YamlNode& node) {
  typed_.choice(node, law_names(catalogue_));
  return node.text;
}

// Takes over what stands here; the rest of `law` stays as it is. `as` is the law whose parameters are allowed.
void FlowsheetReader::law(const YamlNode& map, const std::string& as, LawSpec& law) {
  static const std::vector<std::string> ends = {"saturation"};
  if (as == inert_law) return;
  for (const YamlNode::Entry& entry : map.entries) {
    const ParameterSpec* spec = law_parameter(as, entry.key);
    if (!spec) continue;
    const TypedAmount unread{{0, spec->unit}, "", false, entry.value.place};  // has its fault, and counts as given
    law.parameters[entry.key] = parameter(entry.value, *spec).value_or(unread);
  }
  if (const YamlNode* node = map.find("to")) law.to = typed_.choice(*node, ends).value_or("");
  if (const YamlNode* node = map.find("at")) reference(*node, law);
  if (const YamlNode::Entry* entry = find_entry(map, "orders")) orders(*entry, law);
}

// Conditions at which the constant was measured. Those of a part replace the mineral's as a whole.
void FlowsheetReader::reference(const YamlNode& map, LawSpec& law) {
  if (!typed_.is_map(map)) return;
  law.at.clear();
  for (const YamlNode::Entry& entry : map.entries) {
    TypedAmount& typed = law.at[entry.key];  // stays, as given, if it cannot be read
    typed.place = entry.value.place;
    if (entry.key != "temperature") {
      typed = amount(entry.value, reference_form).value_or(typed);
    } else if (temperature(entry.value)) {
      typed.quantity = parse_quantity(entry.value.text).quantity;
    }
  }
}

void FlowsheetReader::orders(const YamlNode::Entry& entry, LawSpec& law) {
  if (!typed_.is_map(entry.value)) return;
  law.orders.clear();
  law.orders_place = entry.key_place;
  for (const YamlNode::Entry& one : entry.value.entries)
    if (const auto order = typed_.number(one.value, -steepest, steepest)) law.orders.emplace_back(one.key, *order);
}

// What the law needs is there, once a part has taken over what its mineral says.
void FlowsheetReader::check_law(const LawSpec& law, const std::string& name) {
  if (law.law.empty()) {
    fault(Code::missing_key, law.place, fmt::format("{} needs a law: {}", in_quotes(name), fmt::join(law_names(catalogue_), ", ")));
    return;
  }
  const auto kind = catalogue_.laws.find(law.law);
  if (kind == catalogue_.laws.end()) return;
  for (const ParameterSpec& spec : kind->second.parameters)
    if (spec.required && spec.name != from_reference && !law.parameters.count(spec.name))
      fault(Code::missing_key, law.place,
            fmt::format("{}: the law {} needs its {}, the {}; write for example {}: {}", in_quotes(name), law.law, spec.name, spec.meaning, spec.name,
                        example_of(spec.unit)));
  for (const auto& [species, order] : law.orders)
    if (!law.at.count(species))
      fault(Code::missing_key, law.orders_place,
            fmt::format("{}: the order in {} needs the concentration at which the constant was measured; write for example at: {{{}: 0.1 mol/L}}",
                        in_quotes(name), species, species));
  const auto energy = law.parameters.find(energy_parameter);
  if (energy != law.parameters.end() && energy->second.quantity.number != 0 && !law.at.count("temperature"))
    fault(Code::missing_key, energy->second.place,
          fmt::format("{}: the activation energy needs the temperature at which the constant was measured; write for example at: {{temperature: 25 degC}}",
                      in_quotes(name)));
}

void FlowsheetReader::parts(const YamlNode::Entry& entry, LeachingSpec& leaching) {
  if (!typed_.is_map(entry.value)) return;
  if (entry.value.entries.empty()) fault(Code::missing_key, entry.key_place, "no part stands here; write for example {fast: {share: 80 %, law: at_once}, ...}");
  leaching.law.ultimate_extraction.reset();
  double sum = 0;
  bool complete = true;
  PartSpec* rest = nullptr;
  leaching.parts.reserve(entry.value.entries.size());
  for (const YamlNode::Entry& one : entry.value.entries) {
    PartSpec& made = leaching.parts.emplace_back(part(one, leaching));
    const YamlNode* share = one.value.find("share");
    if (!one.value.is_map()) {
      complete = false;
    } else if (share && !(share->is_scalar() && share->text == "rest")) {
      const auto value = typed_.quantity(*share, "1", 0, 1);
      complete = complete && value;
      made.share = value.value_or(0);
      sum += made.share;
    } else if (rest) {
      complete = false;
      fault(Code::does_not_close, one.key_place, fmt::format("the parts {} and {} have no share; only one can be the rest", rest->name, made.name));
    } else {
      rest = &made;
    }
  }
  if (!complete) return;
  if (rest && sum <= 1 + parts_allowance)
    rest->share = std::max(0.0, 1 - sum);
  else if (rest || std::abs(sum - 1) > parts_allowance)
    fault(Code::does_not_close, entry.key_place, fmt::format("the shares of the parts sum to {:.9g} %; they must make 100 %", 100 * sum));
}

// A part starts as its mineral's law. One that names another law leaves behind the parameters that law does not have.
PartSpec FlowsheetReader::part(const YamlNode::Entry& entry, const LeachingSpec& leaching) {
  PartSpec read;
  read.name = entry.key;
  read.place = entry.key_place;
  read.law = leaching.law;
  read.law.place = entry.key_place;
  own_name(entry);
  const YamlNode& map = entry.value;
  if (!typed_.is_map(map)) return read;
  if (const YamlNode* node = map.find("law")) read.law.law = law_name(*node);
  std::vector<std::string> keys = law_keys(read.law.law);
  keys.push_back("share");
  if (knows_law(read.law.law)) typed_.only_keys(map, keys);
  if (read.law.law == inert_law) {
    read.law = {};
    read.law.law = inert_law;
    read.law.place = entry.key_place;
    return read;
  }
  law(map, read.law.law, read.law);
  std::erase_if(read.law.parameters, [&](const auto& one) { return !law_parameter(read.law.law, one.first); });
  check_law(read.law, leaching.mineral + "." + read.name);
  return read;
}

}  // namespace leat
