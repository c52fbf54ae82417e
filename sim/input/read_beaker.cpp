#include "sim/input/read_beaker.hpp"

#include <fmt/format.h>

#include <algorithm>

#include "sim/input/read_chemistry_keys.hpp"

namespace leat {
namespace {

constexpr double least_volume = 1e-9, most_volume = 1e6;  // [m3]
constexpr double most_pressure = 1e7;                     // of one gas [Pa]

const AmountForm addition_form{"an amount or a mass", "4.1 mol or 80 g", {"mol", "kg"}, false, false};
const AmountForm water_form{"a volume, a mass or an amount", "1 L", {"m3", "kg", "mol"}, false, false};

class BeakerReader : public KeyReader {
 public:
  BeakerReader(const Catalogue& catalogue, Diagnostics& diagnostics) : KeyReader(catalogue, diagnostics) {}

  void read(const YamlNode& root, BeakerSpec& beaker) {
    static const std::vector<std::string> keys = {"leat", "kind", "title", "chemistry", "beaker", "steps"};
    beaker.place = root.place;
    if (!typed_.is_map(root)) return;
    if (!head(root, "beaker", beaker.title)) return;
    typed_.only_keys(root, keys);
    if (const YamlNode* map = root.find("chemistry")) beaker.chemistry = chemistry(*map);
    if (const YamlNode* map = typed_.required(root, "beaker")) contents(*map, beaker);
    const YamlNode* list = root.find("steps");
    if (!list || !typed_.is_list(*list)) return;
    for (const YamlNode& item : list->items) {
      StepSpec made = step(item);
      for (const StepSpec& other : beaker.steps)
        if (other.name == made.name && !made.name.empty())
          fault(Code::duplicate, made.place, fmt::format("the step {} stands already in line {}", in_quotes(made.name), other.place.line));
      beaker.steps.push_back(std::move(made));
    }
  }

 private:
  void contents(const YamlNode& map, BeakerSpec& beaker) {
    static const std::vector<std::string> keys = {"liquor", "volume", "temperature", "add", "pH", "gas"};
    if (!typed_.is_map(map)) return;
    typed_.only_keys(map, keys);
    if (const YamlNode* node = typed_.required(map, "liquor")) beaker.liquor = liquor(*node);
    if (const YamlNode* node = map.find("volume"))
      beaker.volume = typed_.quantity(*node, "m3", least_volume, most_volume).value_or(beaker.volume);
    if (const YamlNode* node = typed_.required(map, "temperature")) beaker.temperature = temperature(*node).value_or(beaker.temperature);
    if (const YamlNode* node = map.find("add")) beaker.add = additions(*node);
    if (const YamlNode* node = map.find("pH")) beaker.held_ph = typed_.number(*node, 0, 14);
    if (const YamlNode* node = map.find("gas")) gases(*node, beaker);
  }

  // Compounds by amount or mass; water by volume too.
  std::vector<NamedAmount> additions(const YamlNode& map) {
    std::vector<NamedAmount> read;
    if (!typed_.is_map(map)) return read;
    for (const YamlNode::Entry& entry : map.entries)
      if (const auto one = amount(entry.value, entry.key == "water" ? water_form : addition_form)) read.push_back({entry.key, *one});
    return read;
  }

  void gases(const YamlNode& node, BeakerSpec& beaker) {
    if (node.is_scalar() && node.text == "none") return;
    if (!node.is_map()) {
      fault(Code::wrong_kind, node.place, "gas is none, or the partial pressure of each gas, such as {CO2: 40 Pa}");
      return;
    }
    for (const YamlNode::Entry& entry : node.entries)
      if (const auto pressure = typed_.quantity(entry.value, "Pa", 0, most_pressure)) beaker.gases[entry.key] = {*pressure, entry.value.place};
  }

  StepSpec step(const YamlNode& map) {
    static const std::vector<std::string> keys = {"name", "add", "as", "until", "with", "filter_off", "heat_to"};
    static const std::vector<std::string> filtered = {"all"};
    StepSpec read;
    read.place = map.place;
    if (!typed_.is_map(map)) return read;
    typed_.only_keys(map, keys);
    if (const YamlNode* node = typed_.required(map, "name")) read.name = typed_.text(*node).value_or("");
    if (const YamlNode* node = map.find("add")) read.add = additions(*node);
    if (const YamlNode::Entry* entry = find_entry(map, "as")) {
      read.as = closed_shares(*entry);
      if (!map.find("add") && !map.find("with")) fault(Code::missing_key, entry->key_place, "'as' says how strong a compound comes, but nothing is added");
    }
    until(map, read);
    if (const YamlNode* node = map.find("filter_off")) read.filter_off = typed_.choice(*node, filtered).has_value();
    if (const YamlNode* node = map.find("heat_to")) read.heat_to = temperature(*node);
    return read;
  }

  void until(const YamlNode& map, StepSpec& step) {
    static const std::vector<std::string> keys = {"pH"};
    const YamlNode* goal = map.find("until");
    const YamlNode* with = map.find("with");
    if (goal && typed_.is_map(*goal)) {
      typed_.only_keys(*goal, keys);
      if (const YamlNode* node = typed_.required(*goal, "pH")) step.until_ph = typed_.number(*node, 0, 14);
    }
    if (with) step.with = typed_.text(*with).value_or("");
    if (goal && !with) fault(Code::missing_key, goal->place, "until needs the compound to dose; write for example with: H2SO4");
    if (with && !goal) fault(Code::missing_key, with->place, "with needs what to dose until; write for example until: {pH: 2.0}");
  }
};

}  // namespace

std::optional<BeakerSpec> read_beaker(std::string_view text, const std::string& file, const Catalogue& catalogue, Diagnostics& diagnostics) {
  const std::optional<YamlNode> root = read_yaml(text, file, diagnostics);
  if (!root) return std::nullopt;
  BeakerSpec beaker;
  beaker.file = file;
  beaker.text = text;
  BeakerReader(catalogue, diagnostics).read(*root, beaker);
  return beaker;
}

}  // namespace leat
