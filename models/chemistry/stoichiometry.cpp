#include "models/chemistry/stoichiometry.hpp"

#include <algorithm>
#include <cctype>
#include <cmath>

namespace leat {
namespace {

constexpr int deepest_chain = 12;  // reactions that refer to one another

bool add_name(const SpeciesLibrary& library, const std::string& name, double factor, ComponentAmounts& out, int depth,
              std::string& fault);

bool add_terms(const SpeciesLibrary& library, const std::vector<ReactionTerm>& terms, const std::string& skip,
               double factor, ComponentAmounts& out, int depth, std::string& fault) {
  if (depth > deepest_chain) {
    fault = "reactions refer to one another in a ring";
    return false;
  }
  for (const ReactionTerm& term : terms)
    if (term.name != skip && !add_name(library, term.name, factor * term.coefficient, out, depth, fault)) return false;
  return true;
}

bool add_name(const SpeciesLibrary& library, const std::string& name, double factor, ComponentAmounts& out, int depth,
              std::string& fault) {
  if (name == "e^-") {
    out.amounts[name] += factor;
    return true;
  }
  for (const ComponentEntry& entry : library.components)
    if (entry.name == name) {
      out.amounts[name] += factor;
      return true;
    }
  if (const SpeciesEntry* species = library.find_species(name)) {
    // Made by: other terms -> name, so name = -(other terms).
    out.constants.emplace_back(name, factor);
    return add_terms(library, species->reaction, name, -factor, out, depth + 1, fault);
  }
  if (const SolidEntry* solid = library.find_solid(name); solid && solid->constant) {
    // Dissolves: solid -> other terms, so solid = +(other terms).
    out.constants.emplace_back(solid->name, -factor);
    return add_terms(library, solid->reaction, solid->formula_text, factor, out, depth + 1, fault);
  }
  fault = "'" + name + "' is neither a component nor a species or solid of the library";
  return false;
}

// Takes a neutral compound apart by reading its text from left to right: ligands by their formula, then elements.
class CompoundReader {
 public:
  CompoundReader(const SpeciesLibrary& library, const std::string& text) : library_(library), text_(text) {
    for (const ComponentEntry& entry : library.components)
      if (entry.role == ComponentRole::ligand) ligands_.emplace_back(entry.name.substr(0, entry.name.find('^')), &entry);
    std::sort(ligands_.begin(), ligands_.end(), [](const auto& a, const auto& b) { return a.first.size() > b.first.size(); });
  }

  bool read(std::map<std::string, double>& amounts, std::string& fault) {
    if (!group(1.0, '\0')) {
      fault = "'" + text_ + "' cannot be taken apart into components of the library";
      return false;
    }
    return metals(amounts, fault);
  }

 private:
  double number() {
    std::size_t begin = at_;
    while (at_ < text_.size() && std::isdigit(static_cast<unsigned char>(text_[at_]))) ++at_;
    return begin == at_ ? 1.0 : std::stod(text_.substr(begin, at_ - begin));
  }

  bool group(double factor, char closing) {
    while (at_ < text_.size()) {
      const char c = text_[at_];
      if (c == closing) return true;
      if (c == '(' || c == '[') {
        const std::size_t begin = at_ + 1;
        int depth = 0;
        std::size_t end = at_;
        for (; end < text_.size(); ++end) {
          if (text_[end] == '(' || text_[end] == '[') ++depth;
          if ((text_[end] == ')' || text_[end] == ']') && --depth == 0) break;
        }
        if (end >= text_.size()) return false;
        at_ = end + 1;
        const double multiple = number();
        const std::size_t after = at_;
        at_ = begin;
        if (!group(factor * multiple, text_[end])) return false;
        at_ = after;
        continue;
      }
      if (c == '.') {
        ++at_;
        factor = number();
        continue;
      }
      if (!one(factor)) return false;
    }
    return closing == '\0';
  }

  bool one(double factor) {
    if (text_.compare(at_, 3, "NH4") == 0) {
      at_ += 3;
      const double count = factor * number();
      amounts_["NH3"] += count;
      amounts_["H^+"] += count;
      charge_ += count;
      return true;
    }
    for (const auto& [formula, entry] : ligands_)
      if (text_.compare(at_, formula.size(), formula) == 0 &&
          !(at_ + formula.size() < text_.size() && std::islower(static_cast<unsigned char>(text_[at_ + formula.size()])))) {
        at_ += formula.size();
        const double count = factor * number();
        amounts_[entry->name] += count;
        charge_ += count * entry->formula.charge;
        return true;
      }
    if (!std::isupper(static_cast<unsigned char>(text_[at_]))) return false;
    std::string element(1, text_[at_++]);
    while (at_ < text_.size() && std::islower(static_cast<unsigned char>(text_[at_]))) element += text_[at_++];
    const double count = factor * number();
    if (element == "H") {
      amounts_["H^+"] += count;
      charge_ += count;
    } else if (element == "O") {
      amounts_["H2O"] += count;
      amounts_["H^+"] -= 2 * count;
      charge_ -= 2 * count;
    } else {
      metals_[element] += count;
    }
    return true;
  }

  bool metals(std::map<std::string, double>& amounts, std::string& fault) {
    std::string open;  // the one metal whose oxidation state neutrality decides
    for (const auto& [element, count] : metals_) {
      const ComponentEntry* only = nullptr;
      int states = 0;
      for (const ComponentEntry& entry : library_.components)
        if (entry.role == ComponentRole::metal && entry.formula.atoms.size() == 1 && entry.formula.atoms.count(element)) {
          only = &entry;
          ++states;
        }
      if (states == 0) {
        fault = "'" + text_ + "': the library has no component for " + element;
        return false;
      }
      if (states == 1) {
        amounts_[only->name] += count;
        charge_ += count * only->formula.charge;
      } else if (open.empty()) {
        open = element;
      } else {
        fault = "'" + text_ + "': two metals of variable oxidation state; give it as ions";
        return false;
      }
    }
    if (!open.empty()) {
      const double state = -charge_ / metals_[open];
      for (const ComponentEntry& entry : library_.components)
        if (entry.role == ComponentRole::metal && entry.formula.atoms.count(open) &&
            std::abs(entry.formula.charge - state) < 1e-9) {
          amounts_[entry.name] += metals_[open];
          charge_ = 0;
        }
    }
    if (std::abs(charge_) > 1e-9) {
      fault = "'" + text_ + "' is not neutral as its components (charge " + std::to_string(charge_) + ")";
      return false;
    }
    for (const auto& [name, count] : amounts_) amounts[name] += count;
    return true;
  }

  const SpeciesLibrary& library_;
  std::string text_;
  std::size_t at_ = 0;
  std::vector<std::pair<std::string, const ComponentEntry*>> ligands_;
  std::map<std::string, double> amounts_, metals_;
  double charge_ = 0;
};

}  // namespace

bool expand_terms(const SpeciesLibrary& library, const std::vector<ReactionTerm>& terms, const std::string& skip,
                  ComponentAmounts& out, std::string& fault) {
  return add_terms(library, terms, skip, 1.0, out, 0, fault);
}

bool components_of(const SpeciesLibrary& library, const std::string& name, ComponentAmounts& out, double& molar_mass,
                   std::string& fault) {
  if (name == "water") return components_of(library, "H2O", out, molar_mass, fault);
  const ComponentEntry* component = library.component(name);
  if (component) {
    out.amounts[component->name] += 1;
    molar_mass = library.molar_mass(component->formula);
    return true;
  }
  const SpeciesEntry* species = library.find_species(name);
  const SolidEntry* solid = library.find_solid(name);
  if (species || (solid && solid->constant)) {
    if (!add_name(library, name, 1.0, out, 0, fault)) return false;
    molar_mass = library.molar_mass(species ? species->formula : solid->formula);
    return true;
  }
  const std::string text = solid ? solid->formula_text : name;
  const std::optional<Formula> formula = parse_formula(text, fault);
  if (!formula) return false;
  if (formula->charge != 0) {
    fault = "'" + name + "' is not an ion of the library";
    return false;
  }
  for (const auto& [element, count] : formula->atoms)
    if (!library.atomic_weights.count(element)) {
      fault = "'" + name + "': no atomic weight for " + element;
      return false;
    }
  if (!CompoundReader(library, text).read(out.amounts, fault)) return false;
  molar_mass = library.molar_mass(*formula);
  return true;
}

}  // namespace leat
