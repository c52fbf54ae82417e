#include "sim/input/read_library.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <deque>
#include <iterator>
#include <set>

#include "sim/input/typed_reader.hpp"

namespace leat {
namespace {

const std::array<std::string, 4> evidence_kinds = {"published", "derived", "from memory", "common practice, no source"};

// Reads file by file; faults are collected with their places.
class LibraryReader {
 public:
  explicit LibraryReader(Diagnostics& diagnostics) : diagnostics_(diagnostics), read_(diagnostics) {}

  SpeciesLibrary read(std::span<const std::pair<std::string_view, std::string_view>> files) {
    const auto each = [&](std::string_view top, auto&& take) {
      for (const auto& [name, text] : files) {
        const YamlNode* node = document(name, text);
        if (!node) continue;
        const YamlNode* list = node->find(top);
        if (!list) continue;
        if (list->is_map())
          for (const auto& entry : list->entries) take(entry.key, entry.value);
        else
          for (const YamlNode& item : list->items) take(std::string(), item);
      }
    };
    each("sources", [&](const std::string& key, const YamlNode& node) { source(key, node); });
    each("atomic_weights", [&](const std::string&, const YamlNode& node) { weight(node); });
    each("components", [&](const std::string&, const YamlNode& node) { component(node); });
    each("species", [&](const std::string&, const YamlNode& node) { species(node); });
    each("solids", [&](const std::string&, const YamlNode& node) { solid(node); });
    each("minerals", [&](const std::string&, const YamlNode& node) { solid(node); });
    each("couples", [&](const std::string&, const YamlNode& node) { couple(node); });
    each("gases", [&](const std::string&, const YamlNode& node) { gas(node); });
    each("density_salts", [&](const std::string&, const YamlNode& node) { density_salt(node); });
    each("ionic_volumes", [&](const std::string&, const YamlNode& node) { ionic_volume(node); });
    each("debye_huckel", [&](const std::string&, const YamlNode& node) { debye_huckel(node); });
    each("air_limits", [&](const std::string&, const YamlNode& node) { air_limit(node); });
    for (const auto& [name, text] : files)
      if (const YamlNode* node = document(name, text))
        if (const YamlNode* vapour = node->find("water_vapour")) {
          provenance(*vapour);
          const std::array<std::string, 3> keys = {"a", "b", "c"};
          for (int k = 0; k < 3; ++k)
            if (const YamlNode* value = read_.required(*vapour, keys[k]))
              library_.water_vapour[k] = read_.number(*value).value_or(0);
        }
    std::sort(library_.debye_huckel.begin(), library_.debye_huckel.end(),
              [](const auto& a, const auto& b) { return a.temperature < b.temperature; });
    return std::move(library_);
  }

 private:
  // Each file is parsed once, and its nodes are lent, not copied; null if it cannot be read.
  const YamlNode* document(std::string_view name, std::string_view text) {
    auto found = std::find_if(parsed_.begin(), parsed_.end(), [&](const auto& one) { return one.first == name; });
    if (found == parsed_.end()) {
      parsed_.emplace_back(std::string(name), read_yaml(text, "models/data/" + std::string(name), diagnostics_));
      found = std::prev(parsed_.end());
    }
    return found->second ? &*found->second : nullptr;
  }

  std::string text_of(const YamlNode& node, std::string_view key, bool needed = true) {
    const YamlNode* value = needed ? read_.required(node, key) : node.find(key);
    if (!value) return {};
    return read_.text(*value).value_or("");
  }

  double quantity_of(const YamlNode& node, std::string_view key, std::string_view unit) {
    const YamlNode* value = read_.required(node, key);
    return value ? read_.quantity(*value, unit).value_or(0) : 0;
  }

  Provenance provenance(const YamlNode& node) {
    Provenance out;
    out.source = text_of(node, "source");
    out.where = text_of(node, "where", false);
    out.evidence = text_of(node, "evidence");
    out.note = text_of(node, "note", false);
    if (!out.source.empty() && !library_.sources.count(out.source))
      diagnostics_.fault(Code::bad_data, node.place, "source '" + out.source + "' is not in sources.yaml");
    if (std::find(evidence_kinds.begin(), evidence_kinds.end(), out.evidence) == evidence_kinds.end())
      diagnostics_.fault(Code::bad_data, node.place, "evidence '" + out.evidence + "' is not one of published, derived, from memory, common practice, no source");
    return out;
  }

  Formula formula(const std::string& text, const Place& place) {
    std::string fault;
    const std::optional<Formula> made = parse_formula(text, fault);
    if (!made) {
      diagnostics_.fault(Code::bad_data, place, fault);
      return {};
    }
    for (const auto& [element, count] : made->atoms)
      if (!library_.atomic_weights.count(element))
        diagnostics_.fault(Code::bad_data, place, "no atomic weight for " + element);
    return *made;
  }

  std::vector<ReactionTerm> reaction(const YamlNode& node, std::string_view key) {
    std::string fault;
    const std::string text = text_of(node, key);
    const auto terms = parse_reaction(text, fault);
    if (!terms) {
      diagnostics_.fault(Code::bad_data, node.place, fault);
      return {};
    }
    Formula sum;
    for (const ReactionTerm& term : *terms) {
      const Formula one = formula(term.name, node.place);
      for (const auto& [element, count] : one.atoms) sum.atoms[element] += term.coefficient * count;
      sum.charge += term.coefficient * one.charge;
    }
    for (const auto& [element, count] : sum.atoms)
      if (!(std::abs(count) <= 1e-9))
        diagnostics_.fault(Code::bad_data, node.place, "'" + text + "' does not balance in " + element);
    if (!(std::abs(sum.charge) <= 1e-9)) diagnostics_.fault(Code::bad_data, node.place, "'" + text + "' does not balance in charge");
    return *terms;
  }

  EquilibriumConstant constant(const YamlNode& node) {
    EquilibriumConstant out;
    out.provenance = provenance(node);
    if (const YamlNode* value = read_.required(node, "log10_k")) out.log10_k = read_.number(*value).value_or(0);
    out.temperature = quantity_of(node, "temperature", "K");
    out.ionic_strength = quantity_of(node, "ionic_strength", "mol/kg");
    out.medium = text_of(node, "medium");
    if (const YamlNode* spread = read_.required(node, "spread")) {
      if (spread->is_scalar() && spread->text == "assigned")
        out.spread_assigned = true;
      else
        out.spread = read_.number(*spread, 0).value_or(0.3);
    }
    if (const YamlNode* enthalpy = node.find("enthalpy")) out.enthalpy = read_.quantity(*enthalpy, "J/mol");
    if (const YamlNode* also = node.find("also_at"))
      for (const YamlNode& point : also->items) {
        const YamlNode* value = read_.required(point, "log10_k");
        if (value) out.also_at.emplace_back(quantity_of(point, "temperature", "K"), read_.number(*value).value_or(0));
      }
    return out;
  }

  void source(const std::string& key, const YamlNode& node) {
    library_.sources[key] = text_of(node, "authors", false) + ": " + text_of(node, "title") + " (" + text_of(node, "year", false) + ")";
  }

  void weight(const YamlNode& node) {
    provenance(node);
    library_.atomic_weights[text_of(node, "element")] = quantity_of(node, "weight", "kg/mol");
  }

  void component(const YamlNode& node) {
    ComponentEntry entry;
    entry.name = text_of(node, "name");
    entry.total_name = text_of(node, "total_name");
    entry.element_state = text_of(node, "element_state", false);
    entry.family = text_of(node, "family", false);
    entry.formula = formula(entry.name, node.place);
    const std::string role = text_of(node, "role");
    if (role == "water") entry.role = ComponentRole::water;
    else if (role == "proton") entry.role = ComponentRole::proton;
    else if (role == "metal") entry.role = ComponentRole::metal;
    else if (role == "ligand") entry.role = ComponentRole::ligand;
    else if (role == "gas") entry.role = ComponentRole::gas;
    else diagnostics_.fault(Code::bad_data, node.place, "role '" + role + "' is not water, proton, metal, ligand or gas");
    library_.components.push_back(entry);
  }

  void unique(const std::string& name, const Place& place) {
    if (!names_.insert(name).second) diagnostics_.fault(Code::duplicate, place, "'" + name + "' stands twice in the library");
  }

  void species(const YamlNode& node) {
    SpeciesEntry entry;
    entry.name = text_of(node, "name");
    entry.place = node.place;
    unique(entry.name, node.place);
    entry.formula = formula(entry.name, node.place);
    entry.reaction = reaction(node, "reaction");
    entry.constant = constant(node);
    entry.family = text_of(node, "family", false);
    const bool makes = std::any_of(entry.reaction.begin(), entry.reaction.end(), [&](const ReactionTerm& term) {
      return term.name == entry.name && term.coefficient == 1;
    });
    if (!makes) diagnostics_.fault(Code::bad_data, node.place, "the reaction does not make one " + entry.name);
    library_.species.push_back(std::move(entry));
  }

  void solid(const YamlNode& node) {
    SolidEntry entry;
    entry.name = text_of(node, "name");
    entry.place = node.place;
    unique(entry.name, node.place);
    entry.formula_text = text_of(node, "formula");
    entry.formula = formula(entry.formula_text, node.place);
    entry.density = quantity_of(node, "density", "kg/m3");
    if (node.find("log10_k")) {
      entry.reaction = reaction(node, "reaction");
      entry.constant = constant(node);
      entry.forms_readily = text_of(node, "forms") == "readily";
      entry.density_provenance.source = text_of(node, "density_source");
      entry.density_provenance.evidence = text_of(node, "density_evidence");
      const bool dissolves = std::any_of(entry.reaction.begin(), entry.reaction.end(), [&](const ReactionTerm& term) {
        return term.name == entry.formula_text && term.coefficient == -1;
      });
      if (!dissolves) diagnostics_.fault(Code::bad_data, node.place, "the reaction does not dissolve one " + entry.formula_text);
    } else {
      entry.density_provenance = provenance(node);
    }
    if (node.find("dissolves_as")) entry.dissolves_as = reaction(node, "dissolves_as");
    library_.solids.push_back(std::move(entry));
  }

  void couple(const YamlNode& node) { library_.couples[text_of(node, "name")] = reaction(node, "half_reaction"); }

  void gas(const YamlNode& node) {
    GasEntry entry;
    entry.name = text_of(node, "name");
    entry.reaction = reaction(node, "reaction");
    entry.provenance = provenance(node);
    if (!node.find("henry")) return;  // a gas that dissolves as ions has no single dissolved form
    entry.log10_k = std::log10(quantity_of(node, "henry", "mol/L/atm"));
    entry.slope = quantity_of(node, "henry_temperature", "K");
    for (const ReactionTerm& term : entry.reaction)
      if (term.coefficient > 0) entry.species = term.name;
    library_.gases.push_back(std::move(entry));
  }

  void density_salt(const YamlNode& node) {
    DensitySalt salt;
    salt.name = text_of(node, "name");
    salt.formula = formula(salt.name, node.place);
    salt.provenance = provenance(node);
    for (int k = 0; k < 5; ++k)
      if (const YamlNode* value = read_.required(node, "c" + std::to_string(k))) salt.c[k] = read_.number(*value).value_or(0);
    library_.density_salts.push_back(salt);
  }

  void ionic_volume(const YamlNode& node) {
    provenance(node);
    library_.ionic_volumes[text_of(node, "name")] = quantity_of(node, "volume", "m3/mol");
  }

  void debye_huckel(const YamlNode& node) {
    provenance(node);
    const YamlNode* a = read_.required(node, "A_log10_molal");
    if (a) library_.debye_huckel.push_back({quantity_of(node, "temperature", "K"), read_.number(*a, 0).value_or(0.51)});
  }

  void air_limit(const YamlNode& node) {
    AirLimit limit;
    limit.substance = text_of(node, "substance");
    limit.kind = text_of(node, "kind");
    limit.body = text_of(node, "body");
    limit.year = text_of(node, "year", false);
    limit.evidence = text_of(node, "evidence");
    if (text_of(node, "use", false) != "yes") return;
    if (const YamlNode* value = read_.required(node, "value")) limit.ppm = 1e6 * read_.quantity(*value, "1").value_or(0);
    library_.air_limits.push_back(limit);
  }

  Diagnostics& diagnostics_;
  TypedReader read_;
  SpeciesLibrary library_;
  std::deque<std::pair<std::string, std::optional<YamlNode>>> parsed_;  // stays where it is while it grows
  std::set<std::string> names_;
};

}  // namespace

SpeciesLibrary read_library(std::span<const std::pair<std::string_view, std::string_view>> files, Diagnostics& diagnostics) {
  return LibraryReader(diagnostics).read(files);
}

}  // namespace leat
