#include "sim/results/layout_parts.hpp"

#include <cmath>

namespace leat {

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
  Axis component{"component", "component: all forms of it together, water last", "", {}, {}, false};
  component.labels = chemistry.total_names;
  Axis mineral{"mineral", "solid that may form, or whose saturation is watched", "", {}, {}, false};
  Flags may_form{"may_form", "whether the solid may form here", {"mineral"}, {}, {"watched", "may_form"}};
  for (const PhaseRow& phase : chemistry.phases) {
    mineral.labels.push_back(phase.name);
    may_form.values.push_back(phase.may_form ? 1 : 0);
  }
  Axis family{"family", "family of complexes", "", chemistry.families, {}, false};
  Axis constant{"constant", "species or solid an equilibrium constant belongs to", "", {}, {}, false};
  Variable log10_k{"constant_log10_k", "decadic logarithm of the constant, as measured", "1", {"constant"}, {}};
  Variable temperature{"constant_temperature", "temperature of the measurement", "K", {"constant"}, {}};
  Variable strength{"constant_ionic_strength", "ionic strength of the measurement", "mol kg-1", {"constant"}, {}};
  Variable spread{"constant_spread", "half-width of published values, decadic", "1", {"constant"}, {}};
  Variable enthalpy{"constant_enthalpy", "reaction enthalpy", "J mol-1", {"constant"}, {}};
  TextTable reaction{"constant_reaction", "reaction of the constant", "constant", {}};
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
    evidence.values.push_back(used.constant.provenance.evidence);
  }
  set.axes.insert(set.axes.end(), {species, component, mineral, family, constant});
  set.texts.push_back({"species_family", "family of each species", "species", families});
  set.texts.insert(set.texts.end(), {reaction, from, evidence});
  set.variables.insert(set.variables.end(), {log10_k, temperature, strength, spread, enthalpy});
  set.flags.push_back(may_form);
}

void add_cautions(ResultSet& set, const std::vector<Caution>& cautions) {
  std::string text;
  for (const Caution& one : cautions) text += one.kind + ": " + one.text + "\n";
  set.texts.push_back({"cautions", "cautions of this run, a line each", "", {text}});
}

}  // namespace leat
