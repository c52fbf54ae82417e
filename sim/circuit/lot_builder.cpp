#include "sim/circuit/lot_builder.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/nearest.hpp"

namespace leat {
namespace {

constexpr const char* gangue = "gangue";

// `Cu(II) to Cu(I)` or the name of a couple of the library, as a half-reaction that takes up one electron.
bool half_reaction(const SpeciesLibrary& library, const std::string& name, double& electrons, ComponentAmounts& row, std::string& fault) {
  const auto couple = library.couples.find(name);
  if (couple != library.couples.end()) {
    ComponentAmounts all;
    if (!expand_terms(library, couple->second, "", all, fault)) return false;
    electrons = -all.amounts["e^-"];
    all.amounts.erase("e^-");
    row = all;
    return true;
  }
  const std::size_t to = name.find(" to ");
  const ComponentEntry *from = nullptr, *into = nullptr;
  if (to != std::string::npos) {
    from = library.component(name.substr(0, to));
    into = library.component(name.substr(to + 4));
  }
  if (!from || !into || from->role != ComponentRole::metal || into->role != ComponentRole::metal ||
      from->formula.atoms != into->formula.atoms) {
    std::vector<std::string> known;
    for (const auto& [key, value] : library.couples) known.push_back(key);
    fault = "'" + name + "' is not a couple; write O2, or two states of one metal such as Cu(II) to Cu(I)" + did_you_mean(name, known);
    return false;
  }
  electrons = from->formula.charge - into->formula.charge;
  row.amounts[from->name] -= 1;
  row.amounts[into->name] += 1;
  return true;
}

class Planner {
 public:
  Planner(const Flowsheet& flowsheet, const SpeciesLibrary& library, Diagnostics& diagnostics)
      : flowsheet_(flowsheet), library_(library), diagnostics_(diagnostics) {}

  LotPlan plan() {
    std::set<std::string> seen;
    for (const SolidsSpec& solids : flowsheet_.solids)
      for (const SolidPhaseSpec& phase : solids.phases)
        if (seen.insert(phase.mineral).second) mineral(solids, phase);
    for (const LeachingSpec& leaching : flowsheet_.leaching)
      if (!seen.count(leaching.mineral)) {
        std::vector<std::string> fed(seen.begin(), seen.end());
        diagnostics_.fault(Code::unknown_name, leaching.place,
                           "'" + leaching.mineral + "' is not among the phases of any solids" + did_you_mean(leaching.mineral, fed));
      }
    for (const SolidsSpec& solids : flowsheet_.solids)
      for (const std::string& name : solids.inert)
        if (!seen.count(name)) {
          std::vector<std::string> fed(seen.begin(), seen.end());
          diagnostics_.fault(Code::unknown_name, solids.place, "inert names '" + name + "', which is not among the phases" + did_you_mean(name, fed));
        }
    return std::move(plan_);
  }

 private:
  void mineral(const SolidsSpec& solids, const SolidPhaseSpec& phase) {
    const Place& place = phase.share.place;
    const bool inert = phase.mineral == gangue ||
                       std::find(solids.inert.begin(), solids.inert.end(), phase.mineral) != solids.inert.end();
    const SolidEntry* entry = library_.find_solid(phase.mineral);
    if (!entry && phase.mineral != gangue) {
      std::vector<std::string> names;
      for (const SolidEntry& one : library_.solids) names.push_back(one.name);
      diagnostics_.fault(Code::unknown_name, place, "'" + phase.mineral + "' is not a mineral of the library" + did_you_mean(phase.mineral, names));
      return;
    }
    const LeachingSpec* leaching = nullptr;
    for (const LeachingSpec& one : flowsheet_.leaching)
      if (one.mineral == phase.mineral) leaching = &one;
    if (inert) {
      if (leaching) diagnostics_.fault(Code::duplicate, leaching->place, phase.mineral + " has a law here and is listed as inert");
      plan_.entries.push_back({phase.mineral, phase.mineral, "", 1, nullptr, {}, {}, {}, place});
      return;
    }
    if (!leaching) {
      if (!entry->constant) {
        diagnostics_.fault(Code::no_law, place,
                           phase.mineral + " is fed but has neither a law under leaching nor a solubility constant; give it a law or list it under inert");
        return;
      }
      plan_.at_equilibrium.push_back(entry->name);
      ComponentAmounts amounts;
      std::string fault;
      expand_terms(library_, entry->reaction, entry->formula_text, amounts, fault);
      for (const auto& [name, count] : amounts.amounts) plan_.components.insert(name);
      return;
    }
    with_law(*entry, *leaching);
  }

  void with_law(const SolidEntry& entry, const LeachingSpec& leaching) {
    LotPlan::Entry lot;
    lot.name = lot.mineral = entry.name;
    lot.leaching = &leaching;
    lot.place = leaching.place;
    const bool reacts = leaching.parts.empty()
                            ? leaching.law.law != "inert"
                            : std::any_of(leaching.parts.begin(), leaching.parts.end(), [](const PartSpec& p) { return p.law.law != "inert"; });
    if (reacts && !products(entry, leaching, lot)) return;
    for (const auto& [name, count] : lot.products) plan_.components.insert(name);
    if (leaching.parts.empty()) {
      add(entry, lot, "", 1, leaching.law);
      return;
    }
    for (const PartSpec& part : leaching.parts) add(entry, lot, part.name, part.share, part.law);
  }

  void add(const SolidEntry& entry, LotPlan::Entry lot, const std::string& part, double share, const LawSpec& law) {
    lot.part = part;
    lot.name = part.empty() ? entry.name : entry.name + "." + part;
    lot.share = share;
    lot.law = law;
    if (law.to == "saturation" && !entry.constant) {
      diagnostics_.fault(Code::no_law, law.place, entry.name + " has no solubility constant, so it has no saturation to dissolve to");
      return;
    }
    if (law.ultimate_extraction && *law.ultimate_extraction < 1) {
      LotPlan::Entry locked = lot;
      locked.name = lot.name + ".locked";
      locked.part = part.empty() ? "locked" : part + ".locked";
      locked.share = share * (1 - *law.ultimate_extraction);
      locked.law = {};
      locked.law.law = "inert";
      plan_.entries.push_back(locked);
      lot.share = share * *law.ultimate_extraction;
    }
    plan_.entries.push_back(lot);
  }

  bool products(const SolidEntry& entry, const LeachingSpec& leaching, LotPlan::Entry& lot) {
    std::string fault;
    ComponentAmounts amounts;
    std::vector<ReactionTerm> terms = entry.constant ? entry.reaction : entry.dissolves_as;
    if (!leaching.reaction.empty()) {
      const auto own = parse_reaction(leaching.reaction, fault);
      if (!own) {
        diagnostics_.fault(Code::bad_data, leaching.place, fault);
        return false;
      }
      terms = *own;
    }
    if (terms.empty()) {
      diagnostics_.fault(Code::no_law, leaching.place,
                         "how " + entry.name + " dissolves is not known: give its reaction, with e^- where it is oxidised");
      return false;
    }
    std::vector<ReactionTerm> others;
    double consumed = 0;
    for (const ReactionTerm& term : terms)
      (term.name == entry.formula_text || term.name == entry.name ? void(consumed -= term.coefficient) : others.push_back(term));
    if (std::abs(consumed - 1) > 1e-12) {
      diagnostics_.fault(Code::bad_data, leaching.place, "the reaction must dissolve exactly one " + entry.formula_text);
      return false;
    }
    if (!expand_terms(library_, others, "", amounts, fault)) {
      diagnostics_.fault(Code::unknown_name, leaching.place, fault);
      return false;
    }
    double electrons = amounts.amounts["e^-"];
    amounts.amounts.erase("e^-");
    if (!couple(entry, leaching, electrons, amounts, lot)) return false;
    return balanced(entry, leaching, amounts, lot);
  }

  bool couple(const SolidEntry& entry, const LeachingSpec& leaching, double electrons, ComponentAmounts& amounts, LotPlan::Entry& lot) {
    const std::string& name = electrons > 0 ? leaching.oxidant : leaching.reductant;
    if (electrons == 0) {
      if (leaching.oxidant.empty() && leaching.reductant.empty()) return true;
      diagnostics_.fault(Code::no_oxidant, leaching.oxidant_place, entry.name + " dissolves without moving electrons: it needs no oxidant or reductant");
      return false;
    }
    if (name.empty()) {
      diagnostics_.fault(Code::no_oxidant, leaching.place,
                         fmt::format("{} {} {:.4g} electrons as it dissolves: name the {}, for example {}", entry.name,
                                     electrons > 0 ? "gives" : "takes", std::abs(electrons), electrons > 0 ? "oxidant" : "reductant",
                                     electrons > 0 ? "oxidant: O2 or oxidant: Cu(II) to Cu(I)" : "reductant: CN^- to OCN^-"));
      return false;
    }
    std::string fault;
    double per = 0;
    ComponentAmounts half;
    if (!half_reaction(library_, name, per, half, fault)) {
      diagnostics_.fault(Code::no_oxidant, leaching.oxidant_place, fault);
      return false;
    }
    if (per * electrons <= 0) {
      diagnostics_.fault(Code::no_oxidant, leaching.oxidant_place, "'" + name + "' moves electrons the wrong way");
      return false;
    }
    const double times = electrons / per;
    for (const auto& [component, count] : half.amounts) {
      amounts.amounts[component] += times * count;
      if (count < 0 && component != "H^+" && component != "H2O") lot.needed.push_back(component);
    }
    return true;
  }

  bool balanced(const SolidEntry& entry, const LeachingSpec& leaching, const ComponentAmounts& amounts, LotPlan::Entry& lot) {
    std::map<std::string, double> left = entry.formula.atoms;
    double charge = 0;
    for (const auto& [name, count] : amounts.amounts) {
      const ComponentEntry* component = library_.component(name);
      for (const auto& [element, atoms] : component->formula.atoms) left[element] -= count * atoms;
      charge += count * component->formula.charge;
      if (count != 0) lot.products[name] = count;
    }
    for (const auto& [element, count] : left)
      if (std::abs(count) > 1e-9) {
        diagnostics_.fault(Code::does_not_balance, leaching.place, "the dissolution of " + entry.name + " does not balance in " + element);
        return false;
      }
    if (std::abs(charge) > 1e-9) {
      diagnostics_.fault(Code::does_not_balance, leaching.place, "the dissolution of " + entry.name + " does not balance in charge");
      return false;
    }
    return true;
  }

  const Flowsheet& flowsheet_;
  const SpeciesLibrary& library_;
  Diagnostics& diagnostics_;
  LotPlan plan_;
};

std::optional<Probe> probe_of(const std::string& name, const Chemistry& chemistry, const SpeciesLibrary& library) {
  const int species = chemistry.find_species(name);
  if (species >= 0) return Probe{ProbeKind::concentration, species};
  const ComponentEntry* component = library.component(name);
  const int total = component ? chemistry.find_component(component->name) : -1;
  if (total >= 0) return Probe{ProbeKind::total, total};
  return std::nullopt;
}

}  // namespace

LotPlan plan_lots(const Flowsheet& flowsheet, const SpeciesLibrary& library, Diagnostics& diagnostics) {
  return Planner(flowsheet, library, diagnostics).plan();
}

namespace {

std::shared_ptr<const RateLaw> make_law(const LotPlan::Entry& entry, const SpeciesLibrary& library, const Catalogue& catalogue,
                                        const Chemistry& chemistry, LiquorMaker& maker, Diagnostics& diagnostics) {
  if (entry.law.law.empty() || entry.law.law == "inert") return nullptr;
  const LawKind& kind = catalogue.laws.at(entry.law.law);
  LawSettings settings;
  for (const ParameterSpec& spec : kind.parameters) {
    const auto typed = entry.law.parameters.find(spec.name);
    if (typed != entry.law.parameters.end())
      settings.values[spec.name] = convert(typed->second.quantity, spec.unit);
    else if (spec.otherwise)
      settings.values[spec.name] = *spec.otherwise;
    else if (spec.required)
      diagnostics.fault(Code::missing_key, entry.law.place, entry.name + " needs " + spec.name);
  }
  const auto temperature = entry.law.at.find("temperature");
  if (temperature != entry.law.at.end()) settings.values["at_temperature"] = convert(temperature->second.quantity, "K");
  const auto energy = settings.values.find("activation_energy");
  if (energy != settings.values.end() && energy->second > 0 && temperature == entry.law.at.end())
    diagnostics.fault(Code::missing_key, entry.law.place, entry.name + ": an activation energy needs the temperature its constant was measured at; write at: {temperature: 25 degC}");
  if (!kind.takes_orders && !entry.law.orders.empty())
    diagnostics.fault(Code::not_supported, entry.law.orders_place, entry.name + ": the law " + kind.name + " takes no orders");
  for (const auto& [name, amount] : entry.law.at)
    if (name != "temperature" && std::none_of(entry.law.orders.begin(), entry.law.orders.end(), [&](const auto& one) { return one.first == name; }))
      diagnostics.fault(Code::bad_data, amount.place, entry.name + ": a reference concentration of " + name + " stands here, but there is no order in it");
  std::set<int> ordered;
  for (const auto& [name, order] : entry.law.orders) {
    const auto probe = probe_of(name, chemistry, library);
    if (!probe) {
      diagnostics.fault(Code::unknown_name, entry.law.orders_place, "'" + name + "' is neither a dissolved species nor a total in play here" +
                                                                        did_you_mean(name, chemistry.total_names));
      continue;
    }
    const auto at = entry.law.at.find(name);
    if (at == entry.law.at.end()) {
      diagnostics.fault(Code::missing_key, entry.law.orders_place,
                        "the order in " + name + " needs the concentration at which the constant was measured; write at: {" + name + ": ...}");
      continue;
    }
    const auto reference = maker.concentration(name, at->second);
    if (!reference) continue;
    if (*reference <= 0) {
      diagnostics.fault(Code::out_of_range, at->second.place, "a reference concentration must be above zero");
      continue;
    }
    settings.orders.push_back({*probe, order, *reference});
    if (probe->kind == ProbeKind::total) ordered.insert(probe->index);
    else if (probe->index < chemistry.component_count()) ordered.insert(probe->index);
  }
  if (entry.law.to == "saturation") settings.saturation_phase = chemistry.find_phase(entry.mineral);
  for (const std::string& name : entry.needed) {
    const int component = chemistry.find_component(name);
    if (!ordered.count(component)) settings.needed.push_back({ProbeKind::total, component});
  }
  if (!diagnostics.ok()) return nullptr;
  return kind.make(settings);
}

}  // namespace

std::vector<Lot> make_lots(const LotPlan& plan, const Flowsheet& flowsheet, const SpeciesLibrary& library, const Catalogue& catalogue,
                           const Chemistry& chemistry, const std::vector<std::string>& elements, LiquorMaker& maker,
                           Diagnostics& diagnostics) {
  std::vector<Lot> lots;
  for (const LotPlan::Entry& entry : plan.entries) {
    Lot lot;
    lot.name = entry.name;
    lot.mineral = entry.mineral;
    lot.part = entry.part;
    lot.elements.assign(elements.size(), 0.0);
    lot.products.assign(chemistry.component_count() + 1, 0.0);
    if (entry.mineral == gangue) {
      double density = 2700;
      for (const SolidsSpec& solids : flowsheet.solids)
        if (solids.gangue_density > 0) density = solids.gangue_density;
      lot.molar_mass = 1;  // a mol of gangue is a kilogram
      lot.molar_volume = 1 / density;
    } else {
      const SolidEntry& solid = *library.find_solid(entry.mineral);
      lot.molar_mass = library.molar_mass(solid.formula);
      lot.molar_volume = lot.molar_mass / solid.density;
      for (const auto& [element, count] : solid.formula.atoms)
        lot.elements[std::find(elements.begin(), elements.end(), element) - elements.begin()] = count;
    }
    for (const auto& [name, count] : entry.products) lot.products[chemistry.find_component(name)] = count;
    lot.law = make_law(entry, library, catalogue, chemistry, maker, diagnostics);
    lots.push_back(std::move(lot));
  }
  return lots;
}

}  // namespace leat
