#include "models/chemistry/chemistry.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <set>

#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"

namespace leat {
namespace {

constexpr std::array<const char*, 15> family_order = {
    "free",      "ammine",   "chloro",    "cyano",   "hydroxo",   "thiosulfato", "thiocyanato", "hydrosulfido",
    "glycinato", "sulfato",  "carbonato", "nitrato", "carbamato", "cyanato",     "mixed"};

std::string reaction_text(const std::vector<ReactionTerm>& terms) {
  std::string left, right;
  for (const ReactionTerm& term : terms) {
    std::string& side = term.coefficient < 0 ? left : right;
    if (!side.empty()) side += " + ";
    const double size = std::abs(term.coefficient);
    if (size != 1) {
      std::string number = std::to_string(size);
      number.erase(number.find_last_not_of('0') + 1);
      if (number.back() == '.') number.pop_back();
      side += number + " ";
    }
    side += term.name;
  }
  return left + " = " + right;
}

// Compiles step by step; one instance per chemistry.
class Compiler {
 public:
  Compiler(const SpeciesLibrary& library, const ChemistryRequest& request, const Place& place, Diagnostics& diagnostics)
      : library_(library), request_(request), place_(place), diagnostics_(diagnostics), made_(std::make_shared<Chemistry>()) {}

  std::shared_ptr<const Chemistry> compile() {
    add_components();
    add_species();
    add_phases();
    add_gases();
    add_elements();
    check_names();
    made_->debye_huckel = library_.debye_huckel;
    made_->fixed_debye_huckel_a = request_.fixed_debye_huckel_a;
    made_->activity = request_.activity;
    for (const MassActionRow& row : made_->species) made_->activity_species.push_back({row.name, row.charge});
    made_->liquor_volume = LiquorVolume(library_, made_->component_names, made_->component_mass, made_->hydrogen,
                                        request_.one_kg_water_per_litre);
    return made_;
  }

 private:
  void add_components() {
    std::set<std::string> wanted = {"H^+"};
    for (const std::string& name : request_.components) {
      const ComponentEntry* entry = library_.component(name);
      if (entry && entry->role != ComponentRole::water) wanted.insert(entry->name);
    }
    const ComponentEntry* water = nullptr;
    for (const ComponentEntry& entry : library_.components) {
      if (entry.role == ComponentRole::water) water = &entry;
      if (!wanted.count(entry.name)) continue;
      if (entry.role == ComponentRole::proton) made_->hydrogen = static_cast<int>(made_->component_names.size());
      push_component(entry);
    }
    push_component(*water);
  }

  void push_component(const ComponentEntry& entry) {
    made_->component_names.push_back(entry.name);
    made_->total_names.push_back(entry.total_name);
    made_->component_charge.push_back(entry.formula.charge);
    made_->component_mass.push_back(library_.molar_mass(entry.formula));
    made_->component_role.push_back(entry.role);
  }

  bool listed(const std::string& name) const {
    return request_.only.empty() || std::find(request_.only.begin(), request_.only.end(), name) != request_.only.end();
  }

  // Row over the components of this case; false if it needs a component that the case has not.
  bool row_of(const ComponentAmounts& amounts, MassActionRow& row) {
    std::vector<double> share(made_->component_names.size(), 0.0);
    for (const auto& [name, count] : amounts.amounts) {
      if (std::abs(count) < 1e-12) continue;
      const auto found = std::find(made_->component_names.begin(), made_->component_names.end(), name);
      if (found == made_->component_names.end()) return false;
      share[found - made_->component_names.begin()] = count;
    }
    for (int j = 0; j < made_->component_count(); ++j)
      if (share[j] != 0) row.shares.push_back({j, share[j]});
    row.water = share.back();
    return true;
  }

  std::string family_of(const MassActionRow& row, const std::string& stated) const {
    if (!stated.empty()) return stated;
    std::set<std::string> found;
    bool metal = false;
    for (const Share& share : row.shares) {
      const ComponentRole role = made_->component_role[share.component];
      if (role == ComponentRole::metal) metal = true;
      if (role == ComponentRole::proton && share.coefficient < 0) found.insert("hydroxo");
      if (role == ComponentRole::ligand) {
        const std::string& family = library_.component(made_->component_names[share.component])->family;
        if (!family.empty()) found.insert(family);
      }
    }
    if (!metal) return "free";
    if (found.empty()) return "free";
    return found.size() == 1 ? *found.begin() : "mixed";
  }

  bool family_in_play(const MassActionRow& row) const {
    if (request_.families.empty()) return true;
    const auto listed = [&](const std::string& family) {
      return std::find(request_.families.begin(), request_.families.end(), family) != request_.families.end();
    };
    if (row.family == "free") return true;
    if (row.family != "mixed") return listed(row.family);
    for (const Share& share : row.shares) {
      const ComponentRole role = made_->component_role[share.component];
      if (role == ComponentRole::proton && share.coefficient < 0 && !listed("hydroxo")) return false;
      if (role == ComponentRole::ligand) {
        const std::string& family = library_.component(made_->component_names[share.component])->family;
        if (!family.empty() && !listed(family)) return false;
      }
    }
    return true;
  }

  int constant_index(const std::string& name) {
    for (std::size_t k = 0; k < made_->constants.size(); ++k)
      if (made_->constants[k].name == name) return static_cast<int>(k);
    if (const SpeciesEntry* species = library_.find_species(name))
      made_->constants.push_back({name, reaction_text(species->reaction), species->constant});
    else {
      const SolidEntry* solid = library_.find_solid(name);
      made_->constants.push_back({name, reaction_text(solid->reaction), *solid->constant});
    }
    return static_cast<int>(made_->constants.size()) - 1;
  }

  // The sign: a species is made with log K; expanding its name gives name = ... with -log K of the makers' reaction.
  void take_constants(const ComponentAmounts& amounts, double sign, MassActionRow& row) {
    for (const auto& [name, multiple] : amounts.constants) row.constants.emplace_back(constant_index(name), sign * multiple);
  }

  void add_species() {
    for (int j = 0; j < made_->component_count(); ++j) {
      MassActionRow row;
      row.name = made_->component_names[j];
      row.shares.push_back({j, 1.0});
      row.charge = made_->component_charge[j];
      row.family = "free";
      made_->species.push_back(row);
    }
    for (const SpeciesEntry& entry : library_.species) {
      ComponentAmounts amounts;
      std::string fault;
      double mass = 0;
      if (!components_of(library_, entry.name, amounts, mass, fault)) continue;
      MassActionRow row;
      row.name = entry.name;
      row.charge = entry.formula.charge;
      if (!row_of(amounts, row)) continue;
      row.family = family_of(row, entry.family);
      if (!family_in_play(row) || !listed(entry.name)) continue;
      take_constants(amounts, 1.0, row);
      made_->species.push_back(row);
    }
  }

  void add_phases() {
    const auto in = [](const std::vector<std::string>& list, const SolidEntry& entry) {
      return std::find(list.begin(), list.end(), entry.name) != list.end() ||
             std::find(list.begin(), list.end(), entry.formula_text) != list.end();
    };
    for (const SolidEntry& entry : library_.solids) {
      if (!entry.constant) continue;
      const bool fed = in(request_.minerals, entry);
      const bool balanced = in(request_.at_equilibrium, entry);
      bool forms = request_.may_form_given ? in(request_.may_form, entry) : entry.forms_readily;
      if (!request_.only.empty()) forms = in(request_.only, entry) && (!request_.may_form_given || forms);
      const bool watched = in(request_.forms_slowly, entry) || request_.only.empty();  // every solid in play is watched
      if (in(request_.forms_slowly, entry)) forms = false;
      if (!fed && !forms && !watched && !balanced) continue;
      ComponentAmounts amounts;
      std::string fault;
      double mass = 0;
      if (!components_of(library_, entry.name, amounts, mass, fault)) continue;
      PhaseRow row;
      row.name = entry.name;
      row.charge = 0;
      if (!row_of(amounts, row)) continue;
      take_constants(amounts, -1.0, row);
      row.molar_mass = library_.molar_mass(entry.formula);
      row.molar_volume = row.molar_mass / entry.density;
      row.may_form = forms || balanced;
      row.at_equilibrium = balanced;
      row.family = "solid";
      made_->phases.push_back(row);
    }
  }

  void add_gases() {
    for (const GasEntry& entry : library_.gases) {
      const int species = made_->find_species(entry.species);
      if (species < 0) continue;
      made_->gases.push_back({entry.name, species, entry.log10_k, entry.slope});
    }
  }

  void add_elements() {
    std::vector<std::string> order;
    const int count = static_cast<int>(made_->component_names.size());
    for (const auto& name : made_->component_names)
      for (const auto& [element, atoms] : library_.component(name)->formula.atoms)
        if (std::find(order.begin(), order.end(), element) == order.end()) order.push_back(element);
    made_->elements = order;
    made_->atoms.assign(count, std::vector<double>(order.size(), 0.0));
    for (int j = 0; j < count; ++j)
      for (const auto& [element, atoms] : library_.component(made_->component_names[j])->formula.atoms)
        made_->atoms[j][made_->find_element(element)] = atoms;
    for (const char* family : family_order) {
      const bool used = std::string_view(family) == "free" ||
                        std::any_of(made_->species.begin(), made_->species.end(),
                                    [&](const MassActionRow& row) { return row.family == family; });
      if (used) made_->families.emplace_back(family);
    }
  }

  void check_names() {
    std::vector<std::string> solids, families(family_order.begin(), family_order.end()), species;
    for (const SolidEntry& entry : library_.solids)
      if (entry.constant) solids.push_back(entry.name);
    for (const SpeciesEntry& entry : library_.species) species.push_back(entry.name);
    for (const auto* list : {&request_.may_form, &request_.forms_slowly})
      for (const std::string& name : *list) {
        const SolidEntry* entry = library_.find_solid(name);
        if (!entry || !entry->constant)
          diagnostics_.fault(Code::unknown_name, place_of(name),
                             "'" + name + "' is not a solid with a constant" + did_you_mean(name, solids));
      }
    for (const std::string& name : request_.may_form)
      if (std::find(request_.forms_slowly.begin(), request_.forms_slowly.end(), name) != request_.forms_slowly.end())
        diagnostics_.fault(Code::duplicate, place_of(name), name + " stands under may_form and under forms_slowly");
    for (const std::string& name : request_.families)
      if (std::find(families.begin(), families.end(), name) == families.end())
        diagnostics_.fault(Code::unknown_name, place_of(name), "'" + name + "' is not a family of complexes" + did_you_mean(name, families) + "; there is " + list_of(families));
    for (const std::string& name : request_.only)
      if (!library_.find_species(name) && !library_.find_solid(name) && !library_.component(name))
        diagnostics_.fault(Code::unknown_name, place_of(name), "'" + name + "' is not in the library" + did_you_mean(name, species));
  }

  static std::string list_of(const std::vector<std::string>& names) {
    std::string list;
    for (const std::string& one : names) list += (list.empty() ? "" : ", ") + one;
    return list;
  }

  Place place_of(const std::string& name) const {
    const auto found = request_.places.find(name);
    return found == request_.places.end() ? place_ : found->second;
  }

  const SpeciesLibrary& library_;
  const ChemistryRequest& request_;
  const Place& place_;
  Diagnostics& diagnostics_;
  std::shared_ptr<Chemistry> made_;
};

}  // namespace

std::shared_ptr<const Chemistry> compile_chemistry(const SpeciesLibrary& library, const ChemistryRequest& request,
                                                   const Place& place, Diagnostics& diagnostics) {
  return Compiler(library, request, place, diagnostics).compile();
}

int Chemistry::find_component(const std::string& name) const {
  for (std::size_t j = 0; j < component_names.size(); ++j)
    if (component_names[j] == name || total_names[j] == name) return static_cast<int>(j);
  return -1;
}

int Chemistry::find_species(const std::string& name) const {
  for (std::size_t i = 0; i < species.size(); ++i)
    if (species[i].name == name) return static_cast<int>(i);
  return -1;
}

int Chemistry::find_phase(const std::string& name) const {
  for (std::size_t s = 0; s < phases.size(); ++s)
    if (phases[s].name == name) return static_cast<int>(s);
  return -1;
}

int Chemistry::find_element(const std::string& name) const {
  const auto found = std::find(elements.begin(), elements.end(), name);
  return found == elements.end() ? -1 : static_cast<int>(found - elements.begin());
}

int Chemistry::family_index(const std::string& name) const {
  const auto found = std::find(families.begin(), families.end(), name);
  return found == families.end() ? -1 : static_cast<int>(found - families.begin());
}

double Chemistry::log10_k(const MassActionRow& row, double temperature) const {
  double sum = 0;
  for (const auto& [index, multiple] : row.constants) sum += multiple * log10_k_at(constants[index].constant, temperature);
  return sum;
}

double Chemistry::debye_huckel_a(double temperature) const {
  if (fixed_debye_huckel_a > 0) return fixed_debye_huckel_a;
  if (debye_huckel.empty()) return 0.51;
  if (temperature <= debye_huckel.front().temperature) return debye_huckel.front().a;
  for (std::size_t k = 1; k < debye_huckel.size(); ++k)
    if (temperature <= debye_huckel[k].temperature) {
      const DebyeHuckelRow &low = debye_huckel[k - 1], &high = debye_huckel[k];
      const double share = (temperature - low.temperature) / (high.temperature - low.temperature);
      return low.a + share * (high.a - low.a);
    }
  return debye_huckel.back().a;
}

double Chemistry::henry(const GasRow& gas, double temperature) const {
  return std::pow(10.0, gas.log10_k) * std::exp(gas.slope * (1 / temperature - 1 / 298.15)) / standard_atmosphere;
}

}  // namespace leat
