#include "sim/circuit/library_overrides.hpp"

#include <cmath>

#include "models/chemistry/stoichiometry.hpp"
#include "models/core/nearest.hpp"

namespace leat {
namespace {

constexpr double assigned_density = 4000;  // of a solid that the user adds; common practice, no source [kg/m3]

// The reaction balances in elements and charge?
bool balances(const std::vector<ReactionTerm>& terms, std::string& fault) {
  Formula sum;
  for (const ReactionTerm& term : terms) {
    const auto one = parse_formula(term.name, fault);
    if (!one) return false;
    for (const auto& [element, count] : one->atoms) sum.atoms[element] += term.coefficient * count;
    sum.charge += term.coefficient * one->charge;
  }
  for (const auto& [element, count] : sum.atoms)
    if (!(std::abs(count) <= 1e-9)) {
      fault = "the reaction does not balance in " + element;
      return false;
    }
  if (!(std::abs(sum.charge) <= 1e-9)) {
    fault = "the reaction does not balance in charge";
    return false;
  }
  return true;
}

EquilibriumConstant user_constant(const OverrideSpec& spec, const EquilibriumConstant& before) {
  EquilibriumConstant constant = before;
  constant.log10_k = spec.log10_beta ? *spec.log10_beta : spec.log10_solubility ? *spec.log10_solubility : spec.log10_k.value_or(0);
  constant.temperature = spec.temperature.value_or(298.15);
  if (spec.enthalpy) constant.enthalpy = spec.enthalpy;
  constant.also_at.clear();
  constant.ionic_strength = 0;
  constant.medium = "as the user states";
  constant.spread = 0.3;
  constant.spread_assigned = true;
  constant.provenance = {spec.source, "flowsheet", "the user's own", spec.note, true};
  return constant;
}

// A new species or solid, made by its reaction.
bool add_new(SpeciesLibrary& library, const OverrideSpec& spec, Diagnostics& diagnostics, std::string& fault) {
  const auto terms = parse_reaction(spec.reaction, fault);
  if (!terms || !balances(*terms, fault)) return false;
  double makes = 0;
  for (const ReactionTerm& term : *terms)
    if (term.name == spec.name) makes = term.coefficient;
  const auto formula = parse_formula(spec.name, fault);
  if (!formula) return false;
  if (makes == 1) {
    library.species.push_back({spec.name, *formula, *terms, user_constant(spec, {}), "", spec.place});
    return true;
  }
  if (makes == -1) {
    SolidEntry solid;
    solid.name = solid.formula_text = spec.name;
    solid.formula = *formula;
    solid.reaction = *terms;
    solid.constant = user_constant(spec, {});
    solid.density = assigned_density;
    diagnostics.caution(Code::bad_data, spec.place, spec.name + " is a solid of your own: its density is taken as 4 g/cm3");
    solid.density_provenance = {"assigned", "", "common practice, no source", "", true};
    solid.place = spec.place;
    library.solids.push_back(solid);
    return true;
  }
  fault = "the reaction neither makes one " + spec.name + " (a species) nor dissolves one (a solid)";
  return false;
}

}  // namespace

SpeciesLibrary with_overrides(const SpeciesLibrary& original, const ChemistrySpec& chemistry, Diagnostics& diagnostics) {
  SpeciesLibrary library = original;
  std::vector<std::string> names;
  for (const SpeciesEntry& entry : library.species) names.push_back(entry.name);
  for (const SolidEntry& entry : library.solids) names.push_back(entry.name);
  for (const OverrideSpec& spec : chemistry.constants) {
    std::string fault;
    SpeciesEntry* species = nullptr;
    SolidEntry* solid = nullptr;
    for (SpeciesEntry& entry : library.species)
      if (entry.name == spec.name) species = &entry;
    for (SolidEntry& entry : library.solids)
      if (entry.name == spec.name && entry.constant) solid = &entry;
    if (!spec.reaction.empty() && (species || solid)) {
      const auto terms = parse_reaction(spec.reaction, fault);
      const std::string own = species ? spec.name : solid->formula_text;
      double makes = 0;
      if (terms)
        for (const ReactionTerm& term : *terms)
          if (term.name == own) makes += term.coefficient;
      if (!terms || !balances(*terms, fault)) {
        diagnostics.fault(Code::does_not_balance, spec.place, "'" + spec.reaction + "': " + fault);
        continue;
      }
      if (makes != (species ? 1 : -1) || !spec.log10_k) {
        diagnostics.fault(Code::bad_data, spec.place,
                          species ? "a reaction of " + own + " makes one of it and goes with log10_k" : "a reaction of " + spec.name + " dissolves one " + own + " and goes with log10_k");
        continue;
      }
      (species ? species->reaction : solid->reaction) = *terms;
    }
    if (species) {
      if (spec.log10_solubility) {
        diagnostics.fault(Code::bad_data, spec.place, spec.name + " is dissolved; write log10_beta or log10_k");
        continue;
      }
      if (spec.log10_beta) {
        // Overall formation from the components, whatever steps the library takes.
        ComponentAmounts amounts;
        double mass = 0;
        components_of(library, spec.name, amounts, mass, fault);
        species->reaction.clear();
        for (const auto& [name, count] : amounts.amounts)
          if (count != 0) species->reaction.push_back({name, -count});
        species->reaction.push_back({spec.name, 1});
      }
      species->constant = user_constant(spec, species->constant);
    } else if (solid) {
      if (spec.log10_beta) {
        diagnostics.fault(Code::bad_data, spec.place, spec.name + " is a solid; write log10_solubility or log10_k");
        continue;
      }
      solid->constant = user_constant(spec, *solid->constant);
    } else if (spec.reaction.empty()) {
      diagnostics.fault(Code::unknown_name, spec.place,
                        "'" + spec.name + "' is not in the library" + did_you_mean(spec.name, names) + "; a new one needs a reaction");
    } else if (!add_new(library, spec, diagnostics, fault)) {
      diagnostics.fault(Code::bad_data, spec.place, fault);
    }
  }
  return library;
}

}  // namespace leat
