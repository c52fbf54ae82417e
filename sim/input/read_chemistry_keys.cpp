#include "sim/input/read_chemistry_keys.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <stdexcept>

#include "models/core/nearest.hpp"
#include "sim/input/file_kinds.hpp"

namespace leat {
namespace {

constexpr double coldest = 200, hottest = 500;  // [K]
constexpr double share_allowance = 5e-4;        // that shares without a rest may lack to a whole [1]
constexpr double rounding = 1e-11;              // that shares may sum to over a whole [1]
constexpr double largest_logarithm = 300;       // of a constant [1]

const AmountForm concentration_form{"a concentration", "0.5 mol/L, 600 mg/L, 0.5 mol/kg or 2 %", {"mol/m3", "kg/m3", "mol/kg", "1"}, false, true};

std::string_view trim(std::string_view text) {
  const std::size_t first = text.find_first_not_of(" \t");
  return first == std::string_view::npos ? std::string_view() : text.substr(first, text.find_last_not_of(" \t") - first + 1);
}

// Cuts "600 mg/L as NaCN" into the quantity and what it is counted as; true if there was an `as`.
bool cut_as(std::string_view& text, std::string_view& as) {
  const std::size_t at = text.find(" as ");
  if (at != std::string_view::npos) {
    as = trim(text.substr(at + 4));
    text = trim(text.substr(0, at));
    return true;
  }
  if (!text.ends_with(" as")) return false;
  text = trim(text.substr(0, text.size() - 3));
  return true;
}

}  // namespace

const YamlNode::Entry* find_entry(const YamlNode& map, std::string_view key) {
  for (const YamlNode::Entry& entry : map.entries)
    if (entry.key == key) return &entry;
  return nullptr;
}

std::vector<std::string> keys_of(const YamlNode* map) {
  std::vector<std::string> keys;
  if (map)
    for (const YamlNode::Entry& entry : map->entries) keys.push_back(entry.key);
  return keys;
}

std::string in_quotes(std::string_view text) {
  constexpr std::size_t longest = 60;  // [byte]
  std::size_t length = std::min(text.size(), longest);
  while (length < text.size() && (static_cast<unsigned char>(text[length]) & 0xC0) == 0x80) --length;  // not inside a character
  std::string shown(text.substr(0, length));
  for (char& c : shown)
    if (c == '\n' || c == '\t' || c == '\r') c = ' ';
  return "'" + shown + (length < text.size() ? "...'" : "'");
}

std::string example_of(std::string_view unit) {
  constexpr std::string_view lead = "write for example ";
  const std::string hint = unit_hint("", unit);
  const std::size_t at = hint.find(lead);
  return at == std::string::npos ? "1 " + std::string(unit) : hint.substr(at + lead.size());
}

void KeyReader::text_at(const YamlNode& map, std::string_view key, std::string& value) {
  if (const YamlNode* node = map.find(key)) value = typed_.text(*node).value_or("");
}

bool KeyReader::head(const YamlNode& root, const std::string& kind, std::string& title) {
  if (const YamlNode* node = typed_.required(root, "leat")) typed_.whole_number(*node, 1, 1);
  bool other = false;
  if (const YamlNode* node = typed_.required(root, "kind")) {
    const auto word = typed_.text(*node);
    const auto& kinds = file_kinds();
    other = word && *word != kind && std::find(kinds.begin(), kinds.end(), *word) != kinds.end();
    if (word && *word != kind)
      fault(Code::unknown_name, node->place, fmt::format("the file is of kind {}; {} is needed here{}", in_quotes(*word), kind,
                                                         other ? ". Use " + verb_for(*word) : did_you_mean(*word, kinds)));
  }
  text_at(root, "title", title);
  return !other;
}

std::optional<double> KeyReader::temperature(const YamlNode& node) { return typed_.quantity(node, "K", coldest, hottest); }

std::vector<std::string> KeyReader::names(const YamlNode& node) {
  std::vector<std::string> read;
  const auto take = [&](const YamlNode& item) {
    const auto name = typed_.text(item);
    if (!name) return;
    if (std::find(read.begin(), read.end(), *name) != read.end())
      fault(Code::duplicate, item.place, in_quotes(*name) + " is named twice in this list");
    else
      read.push_back(*name);
  };
  if (!node.is_list()) return typed_.text_list(node);
  for (const YamlNode& item : node.items) take(item);
  return read;
}

std::string KeyReader::name_among(const YamlNode& node, std::string_view what, const std::vector<std::string>& known) {
  const auto name = typed_.text(node);
  if (!name) return "";
  if (std::find(known.begin(), known.end(), *name) != known.end()) return *name;
  const std::string list = known.empty() ? "none is named in this file" : fmt::format("there is: {}", fmt::join(known, ", "));
  fault(Code::unknown_name, node.place, fmt::format("{} is not the name of {}{}; {}", in_quotes(*name), what, did_you_mean(*name, known), list));
  return "";
}

bool KeyReader::own_name(const YamlNode::Entry& entry) {
  if (entry.key.find_first_of(" \t\r\n./:") == std::string::npos) return true;
  fault(Code::bad_data, entry.key_place, fmt::format("{} cannot be a name; leave out blanks, '.', '/' and ':'", in_quotes(entry.key)));
  return false;
}

bool KeyReader::in_form(const YamlNode& node, const Quantity& quantity, const AmountForm& form) {
  const auto unit = std::find_if(form.units.begin(), form.units.end(), [&](std::string_view to) { return convertible(quantity.unit, to); });
  if (unit == form.units.end()) {
    fault(Code::wrong_unit, node.place,
          quantity.unit.empty() ? fmt::format("{} has no unit; {} is needed, write for example {}", in_quotes(node.text), form.what, form.example)
                                : fmt::format("{} is not {}; write for example {}", in_quotes(node.text), form.what, form.example));
    return false;
  }
  double value = 0;
  try {
    value = convert(quantity, *unit);
  } catch (const std::invalid_argument& error) {
    fault(Code::bad_quantity, node.place, in_quotes(node.text) + ": " + error.what());
    return false;
  }
  const bool ratio = *unit == "1";
  if (value >= 0 && (!ratio || value <= 1)) return true;
  fault(Code::out_of_range, node.place, fmt::format("{} is out of range; allowed is {}", in_quotes(node.text), ratio ? "0 to 100 %" : "0 or more"));
  return false;
}

std::optional<TypedAmount> KeyReader::amount(const YamlNode& node, const AmountForm& form) {
  TypedAmount read;
  read.place = node.place;
  if (!node.is_scalar()) {
    fault(Code::wrong_kind, node.place, fmt::format("a {} stands here; {} is needed, such as {}", node.is_list() ? "list" : "map", form.what, form.example));
    return std::nullopt;
  }
  std::string_view text = trim(node.text);
  if (text == "rest") {
    read.rest = true;
    if (form.rest) return read;
    fault(Code::bad_quantity, node.place, fmt::format("'rest' cannot stand here; write {}, such as {}", form.what, form.example));
    return std::nullopt;
  }
  std::string_view as;
  if (cut_as(text, as)) {
    const bool one_word = !as.empty() && as.find_first_of(" \t") == std::string_view::npos;
    if (!form.as || !one_word) {
      fault(Code::bad_quantity, node.place,
            form.as ? fmt::format("{} does not name one compound behind 'as'; write for example 600 mg/L as NaCN", in_quotes(node.text))
                    : fmt::format("{}: 'as' has no meaning here; write {}, such as {}", in_quotes(node.text), form.what, form.example));
      return std::nullopt;
    }
    read.as = as;
  }
  const QuantityReading reading = parse_quantity(text);
  if (!reading.ok) {
    fault(Code::bad_quantity, node.place, fmt::format("{}; write for example {}", reading.fault, form.example));
    return std::nullopt;
  }
  if (!in_form(node, reading.quantity, form)) return std::nullopt;
  read.quantity = reading.quantity;
  return read;
}

std::vector<NamedAmount> KeyReader::amounts(const YamlNode& map, const AmountForm& form) {
  std::vector<NamedAmount> read;
  if (!typed_.is_map(map)) return read;
  for (const YamlNode::Entry& entry : map.entries)
    if (const auto one = amount(entry.value, form)) read.push_back({entry.key, *one});
  return read;
}

std::optional<TypedAmount> KeyReader::parameter(const YamlNode& node, const ParameterSpec& spec) {
  if (node.is_scalar() && parse_number(trim(node.text))) {
    fault(Code::wrong_unit, node.place, in_quotes(node.text) + " " + unit_hint("", spec.unit));
    return std::nullopt;
  }
  if (!typed_.quantity(node, spec.unit, spec.least, spec.most)) return std::nullopt;
  TypedAmount read;
  read.quantity = parse_quantity(node.text).quantity;
  read.place = node.place;
  return read;
}

void KeyReader::one_share(const TypedAmount& amount, double& sum, bool& complete, int& rests) {
  if (!amount.rest) {
    sum += convert(amount.quantity, "1");
  } else if (++rests > 1) {
    fault(Code::does_not_close, amount.place, "'rest' stands here a second time; only one share can be the rest");
    complete = false;
  }
}

std::vector<NamedAmount> KeyReader::closed_shares(const YamlNode::Entry& entry) {
  const std::vector<NamedAmount> shares = amounts(entry.value, mass_share_form);
  double sum = 0;
  int rests = 0;
  bool complete = entry.value.is_map() && shares.size() == entry.value.entries.size();
  for (const NamedAmount& share : shares) one_share(share.amount, sum, complete, rests);
  if (!complete) return shares;
  if (sum > 1 + rounding)
    fault(Code::does_not_close, entry.key_place, fmt::format("the shares sum to {:.9g} %, more than 100 %", 100 * sum));
  else if (rests == 0 && sum < 1 - share_allowance)
    fault(Code::does_not_close, entry.key_place, fmt::format("the shares sum to {:.9g} %; they must make 100 %, or one of them is the 'rest'", 100 * sum));
  return shares;
}

LiquorSpec KeyReader::liquor(const YamlNode& node) {
  LiquorSpec read;
  read.place = node.place;
  if (node.is_scalar()) {
    std::vector<std::string> known = liquor_names_;
    known.push_back("water");
    read.named = name_among(node, "a liquor", known);
    read.water = read.named == "water";
    if (read.water) read.named.clear();
    return read;
  }
  if (!typed_.is_map(node)) return read;
  if (node.entries.empty()) fault(Code::missing_key, node.place, "the liquor holds nothing; write what is dissolved, such as {NaCl: 10 g/L}, or water");
  contents(node, read);
  return read;
}

void KeyReader::contents(const YamlNode& map, LiquorSpec& liquor) {
  const auto add = [&](const YamlNode::Entry& entry) {
    for (const NamedAmount& one : liquor.contents)
      if (one.name == entry.key)
        fault(Code::duplicate, entry.key_place, fmt::format("{} is given twice; it stands already in line {}", in_quotes(entry.key), one.amount.place.line));
    if (entry.key == "water" || entry.key == "H2O") {
      fault(Code::unknown_key, entry.key_place, "water is not typed in a liquor: it makes up what the solutes leave");
    } else if (const auto one = amount(entry.value, concentration_form)) {
      liquor.contents.push_back({entry.key, *one});
    }
  };
  for (const YamlNode::Entry& entry : map.entries) {
    if (entry.key == "pH") {
      liquor.ph = typed_.number(entry.value, 0, 14);
    } else if (entry.key == "balance_with") {
      liquor.balance_with = typed_.text(entry.value).value_or("");
    } else if (entry.key == "temperature") {
      liquor.temperature = temperature(entry.value);
    } else if (entry.key == "ions") {
      if (typed_.is_map(entry.value))
        for (const YamlNode::Entry& ion : entry.value.entries) add(ion);
    } else {
      add(entry);
    }
  }
}

OverrideSpec KeyReader::constant(const YamlNode::Entry& entry) {
  static const std::vector<std::string> keys = {"log10_beta", "log10_solubility", "log10_k", "temperature", "enthalpy", "reaction", "source", "note"};
  OverrideSpec read;
  read.name = entry.key;
  read.place = entry.key_place;
  const YamlNode& map = entry.value;
  if (!typed_.is_map(map)) return read;
  typed_.only_keys(map, keys);
  std::vector<std::string> given;
  const auto logarithm = [&](const char* key, std::optional<double>& value) {
    const YamlNode* node = map.find(key);
    if (!node) return;
    given.push_back(key);
    value = typed_.number(*node, -largest_logarithm, largest_logarithm);
  };
  logarithm("log10_beta", read.log10_beta);
  logarithm("log10_solubility", read.log10_solubility);
  logarithm("log10_k", read.log10_k);
  if (given.empty())
    fault(Code::missing_key, read.place, fmt::format("{} needs one of log10_beta, log10_solubility and log10_k", in_quotes(read.name)));
  else if (given.size() > 1)
    fault(Code::duplicate, read.place, fmt::format("{} has {}; give one of them", in_quotes(read.name), fmt::join(given, " and ")));
  if (const YamlNode* node = map.find("temperature")) read.temperature = temperature(*node);
  if (const YamlNode* node = map.find("enthalpy")) read.enthalpy = typed_.quantity(*node, "J/mol");
  text_at(map, "reaction", read.reaction);
  text_at(map, "note", read.note);
  if (const YamlNode* node = typed_.required(map, "source")) read.source = typed_.text(*node).value_or("");
  return read;
}

ChemistrySpec KeyReader::chemistry(const YamlNode& map) {
  static const std::vector<std::string> keys = {"families", "activity", "may_form", "forms_slowly", "only", "density", "debye_huckel_a", "constants"};
  static const std::vector<std::string> densities = {"one_kg_water_per_litre"};
  constexpr double largest_a = 5;  // [(kg/mol)^0.5]
  ChemistrySpec read;
  read.place = read.activity_place = map.place;
  if (!typed_.is_map(map)) return read;
  typed_.only_keys(map, keys);
  const auto list = [&](const char* key, std::vector<std::string>& value) {
    const YamlNode* node = map.find(key);
    if (!node) return false;
    value = names(*node);
    for (const YamlNode& item : node->items) read.places.emplace(item.text, item.place);
    if (node->is_scalar()) read.places.emplace(node->text, node->place);
    return true;
  };
  list("families", read.families);
  list("forms_slowly", read.forms_slowly);
  list("only", read.only);
  read.may_form_given = list("may_form", read.may_form);
  if (const YamlNode* node = map.find("activity")) {
    std::vector<std::string> models;
    for (const auto& [name, make] : catalogue_.activity) models.push_back(name);
    read.activity_place = node->place;
    if (const auto word = typed_.choice(*node, models)) read.activity = *word;
  }
  if (const YamlNode* node = map.find("density")) read.one_kg_water_per_litre = typed_.choice(*node, densities).has_value();
  if (const YamlNode* node = map.find("debye_huckel_a")) read.debye_huckel_a = typed_.number(*node, 1e-3, largest_a).value_or(0);
  const YamlNode* constants = map.find("constants");
  if (constants && typed_.is_map(*constants))
    for (const YamlNode::Entry& entry : constants->entries) read.constants.push_back(constant(entry));
  return read;
}

}  // namespace leat
