#include "sim/results/layout_parts.hpp"

#include <algorithm>
#include <cmath>

#include "sim/run/cautions.hpp"

namespace leat {
namespace {

std::string word_of(ComponentRole role) {
  switch (role) {
    case ComponentRole::water: return "water";
    case ComponentRole::proton: return "proton";
    case ComponentRole::metal: return "metal";
    case ComponentRole::ligand: return "ligand";
    case ComponentRole::gas: return "gas";
  }
  return "ligand";
}

// The equilibrium constants in play, with their sources.
void add_constants(ResultSet& set, const Chemistry& chemistry, const SpeciesLibrary& library) {
  Axis constant{"constant", "species or solid an equilibrium constant belongs to", "", {}, {}, false};
  Variable log10_k{"constant_log10_k", "decadic logarithm of the constant, as measured", "1", {"constant"}, {}};
  Variable temperature{"constant_temperature", "temperature of the measurement", "K", {"constant"}, {}};
  Variable strength{"constant_ionic_strength", "ionic strength of the measurement", "mol kg-1", {"constant"}, {}};
  Variable spread{"constant_spread", "half-width of published values, decadic", "1", {"constant"}, {}};
  Variable enthalpy{"constant_enthalpy", "reaction enthalpy", "J mol-1", {"constant"}, {}};
  TextTable reaction{"constant_reaction", "reaction of the constant", "constant", {}};
  TextTable key{"constant_key", "short name of the source", "constant", {}};
  TextTable from{"constant_source", "source of the constant", "constant", {}};
  TextTable evidence{"constant_evidence", "how well the source is known", "constant", {}};
  for (const UsedConstant& used : chemistry.constants) {
    constant.labels.push_back(used.name);
    log10_k.values.push_back(used.constant.log10_k);
    temperature.values.push_back(used.constant.temperature);
    strength.values.push_back(used.constant.ionic_strength);
    spread.values.push_back(used.constant.spread);
    enthalpy.values.push_back(used.constant.enthalpy.value_or(std::nan("")));
    reaction.values.push_back(used.reaction);
    const auto source = library.sources.find(used.constant.provenance.source);
    from.values.push_back(source == library.sources.end() ? used.constant.provenance.source : source->second);
    key.values.push_back(used.constant.provenance.source);
    evidence.values.push_back(used.constant.provenance.evidence);
  }
  set.axes.push_back(constant);
  set.texts.insert(set.texts.end(), {reaction, key, from, evidence});
  set.variables.insert(set.variables.end(), {log10_k, temperature, strength, spread, enthalpy});
}

}  // namespace

void add_source(ResultSet& set, const SourceText& source, const char* kind) {
  set.attributes = {{"title", source.title.empty() ? source.file : source.title},
                    {"history", source.program + ": " + kind + " " + source.file},
                    {"source", source.program},
                    {"leat_format_version", format_version},
                    {"leat_kind", kind},
                    {"leat_input_file", source.file}};
  set.texts.push_back({"input_text", "text of the input file", "", {source.text}});
}

void add_chemistry(ResultSet& set, const Chemistry& chemistry, const SpeciesLibrary& library) {
  Axis species{"species", "dissolved species", "", {}, {}, false};
  std::vector<std::string> families;
  for (const MassActionRow& row : chemistry.species) {
    species.labels.push_back(row.name);
    families.push_back(row.family);
  }
  const std::size_t components = chemistry.total_names.size();
  Variable content{"species_content", "component held by one formula unit", "1", {"species", "component"}, {}};
  Variable charge{"species_charge", "charge", "1", {"species"}, {}};
  for (const MassActionRow& row : chemistry.species) {
    std::vector<double> counts(components, 0.0);
    for (const Share& share : row.shares) counts[share.component] = share.coefficient;
    counts[chemistry.water()] = row.water;
    content.values.insert(content.values.end(), counts.begin(), counts.end());
    charge.values.push_back(row.charge);
  }
  TextTable role{"component_role", "part a component plays: water, proton, metal, ligand or gas", "component", {}};
  TextTable complexes{"component_family", "family of the complexes a ligand makes", "component", {}};
  for (std::size_t j = 0; j < components; ++j) {
    role.values.push_back(word_of(chemistry.component_role[j]));
    const auto entry = std::find_if(library.components.begin(), library.components.end(),
                                    [&](const ComponentEntry& one) { return one.total_name == chemistry.total_names[j]; });
    complexes.values.push_back(entry == library.components.end() ? "" : entry->family);
  }
  Axis component{"component", "component: all forms of it together, water last", "", {}, {}, false};
  component.labels = chemistry.total_names;
  Variable component_mass{"component_mass", "molar mass", "kg mol-1", {"component"}, chemistry.component_mass};
  Variable mineral_mass{"mineral_mass", "molar mass", "kg mol-1", {"mineral"}, {}};
  Axis mineral{"mineral", "solid that may form, or whose saturation is watched", "", {}, {}, false};
  Flags may_form{"may_form", "whether the solid may form here", {"mineral"}, {}, {"watched", "may_form"}};
  for (const PhaseRow& phase : chemistry.phases) {
    mineral.labels.push_back(phase.name);
    mineral_mass.values.push_back(phase.molar_mass);
    may_form.values.push_back(phase.may_form ? 1 : 0);
  }
  Axis family{"family", "family of complexes", "", chemistry.families, {}, false};
  set.axes.insert(set.axes.end(), {species, component, mineral, family});
  set.texts.push_back({"species_family", "family of each species", "species", families});
  set.texts.insert(set.texts.end(), {role, complexes});
  set.variables.insert(set.variables.end(), {content, charge, component_mass, mineral_mass});
  set.flags.push_back(may_form);
  add_constants(set, chemistry, library);
}

void add_cautions(ResultSet& set, const std::vector<Caution>& cautions) {
  std::string text;
  for (const Caution& one : cautions) text += one.kind + ": " + one.text + "\n";
  set.texts.push_back({"cautions", "cautions of this run, a line each", "", {text}});
  text.clear();
  for (const std::string& line : cautions_in_short(cautions)) text += line + "\n";
  set.texts.push_back({"cautions_in_short", "the worst caution of each kind, a line each", "", {text}});
}

}  // namespace leat
