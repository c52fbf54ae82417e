// models/chemistry and sim/input: what the embedded library holds, compounds as components, constants at a temperature, and what
// loading refuses.
#include <gtest/gtest.h>

#include <cmath>

#include "models/chemistry/stoichiometry.hpp"
#include "models/core/constants.hpp"
#include "sim/input/read_library.hpp"
#include "tests/support/problem.hpp"

namespace leat {
namespace {

using test::embedded_library;

using Amounts = std::map<std::string, double>;

Amounts components(const std::string& name, double* molar_mass = nullptr) {
  ComponentAmounts out;
  double mass = 0;
  std::string fault;
  EXPECT_TRUE(components_of(embedded_library(), name, out, mass, fault)) << name << ": " << fault;
  std::erase_if(out.amounts, [](const auto& entry) { return std::abs(entry.second) < 1e-12; });
  if (molar_mass) *molar_mass = mass;
  return out.amounts;
}

std::string refusal(const std::string& name) {
  ComponentAmounts out;
  double mass = 0;
  std::string fault;
  return components_of(embedded_library(), name, out, mass, fault) ? "" : fault;
}

TEST(components_of, takes_compounds_apart) {
  struct Row {
    const char* name;
    Amounts amounts;
    double molar_mass;  // [g/mol]
  };
  const Row rows[] = {
      {"NaCN", {{"Na^+", 1}, {"CN^-", 1}}, 49.008},
      {"(NH4)2SO4", {{"NH3", 2}, {"H^+", 2}, {"SO4^2-", 1}}, 132.134},
      {"NH4HCO3", {{"NH3", 1}, {"H^+", 2}, {"CO3^2-", 1}}, 79.055},
      {"NH4OH", {{"NH3", 1}, {"H2O", 1}}, 35.046},
      {"H2SO4", {{"H^+", 2}, {"SO4^2-", 1}}, 98.072},
      {"HCl", {{"H^+", 1}, {"Cl^-", 1}}, 36.458},
      {"CaO", {{"Ca^2+", 1}, {"H2O", 1}, {"H^+", -2}}, 56.077},
      {"Ca(OH)2", {{"Ca^2+", 1}, {"H2O", 2}, {"H^+", -2}}, 74.092},
      {"CuSO4.5H2O", {{"Cu^2+", 1}, {"SO4^2-", 1}, {"H2O", 5}}, 249.677},
      {"Na2CO3", {{"Na^+", 2}, {"CO3^2-", 1}}, 105.988},
      {"FeCl3", {{"Fe^3+", 1}, {"Cl^-", 3}}, 162.195},
      {"FeSO4", {{"Fe^2+", 1}, {"SO4^2-", 1}}, 151.901},
      {"CuCl", {{"Cu^+", 1}, {"Cl^-", 1}}, 98.996},
      {"AgNO3", {{"Ag^+", 1}, {"NO3^-", 1}}, 169.874},
      {"NaOH", {{"Na^+", 1}, {"H2O", 1}, {"H^+", -1}}, 39.997},
      {"water", {{"H2O", 1}}, 18.015},
  };
  for (const Row& row : rows) {
    double mass = 0;
    EXPECT_EQ(components(row.name, &mass), row.amounts) << row.name;
    EXPECT_NEAR(1000 * mass, row.molar_mass, 1e-3) << row.name;
  }
}

TEST(components_of, knows_what_the_library_lists) {
  EXPECT_EQ(components("NH4^+"), (Amounts{{"NH3", 1}, {"H^+", 1}}));
  EXPECT_EQ(components("OH^-"), (Amounts{{"H2O", 1}, {"H^+", -1}}));
  EXPECT_EQ(components("CO2"), (Amounts{{"CO3^2-", 1}, {"H^+", 2}, {"H2O", -1}}));
  EXPECT_EQ(components("Zn(OH)(NH3)2^+"), (Amounts{{"Zn^2+", 1}, {"NH3", 2}, {"H2O", 1}, {"H^+", -1}}));
  EXPECT_EQ(components("malachite"), (Amounts{{"Cu^2+", 2}, {"CO3^2-", 1}, {"H2O", 2}, {"H^+", -2}}));
  EXPECT_EQ(components("Ag(I)"), (Amounts{{"Ag^+", 1}}));  // by the name of the total
}

TEST(components_of, refuses_what_it_cannot_take_apart) {
  EXPECT_EQ(refusal("Xx2O"), "'Xx2O': no atomic weight for Xx");
  EXPECT_EQ(refusal("NaOCl"), "'NaOCl' is not neutral as its components (charge -2.000000)");
  EXPECT_EQ(refusal("Foo^2+"), "'Foo^2+' is not an ion of the library");
  EXPECT_EQ(refusal("PtCl4"), "'PtCl4': the library has no component for Pt");
  EXPECT_EQ(refusal("na"), "'na' is not a formula: unexpected 'n'");
  EXPECT_NE(refusal("Na2S"), "");
}

// Every reaction of the library conserves mass as well as elements: components weigh what the species weighs.
TEST(embedded_library, species_weigh_what_their_components_weigh) {
  const SpeciesLibrary& library = embedded_library();
  const auto weigh = [&](const std::string& name, const Formula& formula) {
    double mass = 0, sum = 0;
    for (const auto& [component, amount] : components(name, &mass)) sum += amount * library.molar_mass(library.component(component)->formula);
    EXPECT_NEAR(sum, library.molar_mass(formula), 1e-12) << name;
    EXPECT_NEAR(mass, library.molar_mass(formula), 1e-12) << name;
  };
  for (const SpeciesEntry& species : library.species) weigh(species.name, species.formula);
  for (const SolidEntry& solid : library.solids)
    if (solid.constant) weigh(solid.name, solid.formula);
}

TEST(embedded_library, every_number_names_its_source) {
  const SpeciesLibrary& library = embedded_library();
  const auto sourced = [&](const EquilibriumConstant& constant, const std::string& name) {
    EXPECT_TRUE(library.sources.count(constant.provenance.source)) << name;
    EXPECT_FALSE(constant.provenance.evidence.empty()) << name;
    EXPECT_GT(constant.spread, 0) << name;
    EXPECT_FALSE(constant.provenance.user) << name;
  };
  EXPECT_GT(library.species.size(), 150u);
  for (const SpeciesEntry& species : library.species) sourced(species.constant, species.name);
  for (const SolidEntry& solid : library.solids)
    if (solid.constant) sourced(*solid.constant, solid.name);
}

const EquilibriumConstant& constant_of(const std::string& name) { return embedded_library().find_species(name)->constant; }

// At the temperatures of its table a constant is the table's.
TEST(log10_k, meets_its_table) {
  const double celsius[] = {0, 10, 20, 25, 30, 40, 50, 60, 70, 80, 90, 100};
  const double water[] = {-14.938, -14.528, -14.163, -13.995, -13.836, -13.542, -13.275, -13.034, -12.814, -12.613, -12.431, -12.264};
  for (int k = 0; k < 12; ++k) EXPECT_NEAR(log10_k_at(constant_of("OH^-"), celsius[k] + zero_celsius), water[k], 1e-12) << celsius[k];
  EXPECT_NEAR(log10_k_at(constant_of("NH4^+"), 283.15), 9.731, 1e-12);
  EXPECT_NEAR(log10_k_at(constant_of("NH4^+"), 298.15), 9.244, 1e-12);
  EXPECT_NEAR(log10_k_at(constant_of("NH4^+"), 313.15), 8.805, 1e-12);
  EXPECT_NEAR(log10_k_at(constant_of("HCN"), 283.15), 9.63, 1e-12);
  EXPECT_NEAR(log10_k_at(constant_of("HCN"), 298.15), 9.21, 1e-12);
  EXPECT_NEAR(log10_k_at(constant_of("HCN"), 313.15), 8.88, 1e-12);
}

// van 't Hoff from 25 degC with the stated enthalpy alone comes near the table: 0.04 between 10 and 40 degC, which is 5 kJ/mol in the
// enthalpy of hydrogen cyanide, or the half-width of its constants.
TEST(log10_k, van_t_hoff_is_near_the_table) {
  for (const char* name : {"OH^-", "NH4^+", "HCN"}) {
    EquilibriumConstant alone = constant_of(name);
    alone.also_at.clear();
    ASSERT_TRUE(alone.enthalpy.has_value());
    for (double kelvin : {283.15, 313.15}) EXPECT_NEAR(log10_k_at(alone, kelvin), log10_k_at(constant_of(name), kelvin), 0.04) << name << " " << kelvin;
    const double moved = alone.log10_k - *alone.enthalpy / (gas_constant * std::log(10.0)) * (1 / 313.15 - 1 / alone.temperature);
    EXPECT_NEAR(log10_k_at(alone, 313.15), moved, 1e-12) << name;
  }
}

TEST(log10_k, beyond_and_between_its_points) {
  EquilibriumConstant constant;
  constant.log10_k = 5;
  constant.temperature = 298.15;
  EXPECT_EQ(log10_k_at(constant, 350), 5);  // nothing known of its slope
  constant.also_at = {{323.15, 4}};
  EXPECT_EQ(log10_k_at(constant, 280), 5);  // the nearest
  EXPECT_EQ(log10_k_at(constant, 350), 4);
  const double middle = 2 / (1 / 298.15 + 1 / 323.15);  // half way in 1/T
  EXPECT_NEAR(log10_k_at(constant, middle), 4.5, 1e-12);
  constant.enthalpy = -20000;
  EXPECT_NEAR(log10_k_at(constant, 350), 4 + 20000 / (gas_constant * std::log(10.0)) * (1 / 350.0 - 1 / 323.15), 1e-12);
}

// The least a library needs, one species beside; `entry` is the text of that species from line 2 on.
std::string faults_of(const std::string& entry, const std::string& top = "species") {
  const std::string base =
      "sources:\n  book: {title: A book}\n"
      "atomic_weights:\n"
      "  - {element: H, weight: 1.008 g/mol, source: book, evidence: published}\n"
      "  - {element: O, weight: 15.999 g/mol, source: book, evidence: published}\n"
      "  - {element: Ag, weight: 107.87 g/mol, source: book, evidence: published}\n"
      "  - {element: Cl, weight: 35.45 g/mol, source: book, evidence: published}\n"
      "components:\n"
      "  - {name: H2O, role: water, total_name: H2O}\n"
      "  - {name: H^+, role: proton, total_name: H}\n"
      "  - {name: Ag^+, role: metal, total_name: Ag(I)}\n"
      "  - {name: Cl^-, role: ligand, total_name: Cl, family: chloro}\n";
  const std::string text = top + ":\n" + entry;
  const std::vector<std::pair<std::string_view, std::string_view>> files = {{"base.yaml", base}, {"test.yaml", text}};
  Diagnostics diagnostics;
  read_library(files, diagnostics);
  std::string all;
  for (const Diagnostic& fault : diagnostics.faults()) all += (all.empty() ? "" : "\n") + to_string(fault);
  return all;
}

std::string species_with(const std::string& reaction, const std::string& rest) {
  return "  - name: AgCl(aq)\n    reaction: " + reaction + "\n    log10_k: 3.3\n    temperature: 25 degC\n    ionic_strength: 0 mol/kg\n    medium: dilute\n" + rest;
}
const char* const good_reaction = "Ag^+ + Cl^- = AgCl(aq)";

TEST(read_library, takes_a_complete_entry) {
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: 0.1\n    source: book\n    evidence: published\n")), "");
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: assigned\n    source: book\n    evidence: from memory\n")), "");
}

TEST(read_library, refuses_an_entry_without_source_evidence_or_spread) {
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: 0.1\n    evidence: published\n")),
            "models/data/test.yaml:2:5 species[0].source: 'source' is needed here and missing");
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: 0.1\n    source: book\n")),
            "models/data/test.yaml:2:5 species[0].evidence: 'evidence' is needed here and missing\n"
            "models/data/test.yaml:2:5 species[0]: evidence '' is not one of published, derived, from memory, common practice, no source");
  EXPECT_EQ(faults_of(species_with(good_reaction, "    source: book\n    evidence: published\n")),
            "models/data/test.yaml:2:5 species[0].spread: 'spread' is needed here and missing");
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: 0.1\n    source: hearsay\n    evidence: published\n")),
            "models/data/test.yaml:2:5 species[0]: source 'hearsay' is not in sources.yaml");
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: 0.1\n    source: book\n    evidence: surely\n")),
            "models/data/test.yaml:2:5 species[0]: evidence 'surely' is not one of published, derived, from memory, common practice, no source");
  EXPECT_EQ(faults_of(species_with(good_reaction, "    spread: -0.1\n    source: book\n    evidence: published\n")),
            "models/data/test.yaml:8:13 species[0].spread: -0.1 is out of range; allowed is at least 0");
}

TEST(read_library, refuses_a_reaction_that_does_not_balance) {
  const std::string rest = "    spread: 0.1\n    source: book\n    evidence: published\n";
  EXPECT_EQ(faults_of(species_with("Ag^+ + 2 Cl^- = AgCl(aq)", rest)),
            "models/data/test.yaml:2:5 species[0]: 'Ag^+ + 2 Cl^- = AgCl(aq)' does not balance in Cl\n"
            "models/data/test.yaml:2:5 species[0]: 'Ag^+ + 2 Cl^- = AgCl(aq)' does not balance in charge");
  EXPECT_EQ(faults_of(species_with("Ag^+ + Cl^- + H^+ = AgCl(aq)", rest)),
            "models/data/test.yaml:2:5 species[0]: 'Ag^+ + Cl^- + H^+ = AgCl(aq)' does not balance in H\n"
            "models/data/test.yaml:2:5 species[0]: 'Ag^+ + Cl^- + H^+ = AgCl(aq)' does not balance in charge");
  EXPECT_EQ(faults_of(species_with("Ag^+ = Ag^+", rest)), "models/data/test.yaml:2:5 species[0]: the reaction does not make one AgCl(aq)");
  EXPECT_EQ(faults_of(species_with("Ag^+ + Cl^- > AgCl(aq)", rest)),
            "models/data/test.yaml:2:5 species[0]: a reaction has one '=' sign\n"
            "models/data/test.yaml:2:5 species[0]: the reaction does not make one AgCl(aq)");
  EXPECT_NE(faults_of(species_with("inf Ag^+ + Cl^- + inf AgCl(aq) = AgCl(aq) + inf Ag^+ + inf AgCl(aq)", rest)), "");
}

TEST(read_library, refuses_an_unknown_element_and_a_second_entry) {
  const std::string rest = "    spread: 0.1\n    source: book\n    evidence: published\n";
  EXPECT_EQ(faults_of("  - name: Xx^+\n    reaction: Xx^+ = Xx^+\n    log10_k: 0\n    temperature: 25 degC\n    ionic_strength: 0 mol/kg\n    medium: dilute\n" + rest),
            "models/data/test.yaml:2:5 species[0]: no atomic weight for Xx\n"
            "models/data/test.yaml:2:5 species[0]: no atomic weight for Xx\n"
            "models/data/test.yaml:2:5 species[0]: no atomic weight for Xx");
  EXPECT_EQ(faults_of(species_with(good_reaction, rest) + species_with(good_reaction, rest)),
            "models/data/test.yaml:11:5 species[1]: 'AgCl(aq)' stands twice in the library");
}

TEST(read_library, refuses_quantities_without_their_unit) {
  EXPECT_EQ(faults_of("  - name: AgCl(aq)\n    reaction: Ag^+ + Cl^- = AgCl(aq)\n    log10_k: 3.3\n    temperature: 25\n    ionic_strength: 0 mol/kg\n    medium: dilute\n"
                      "    spread: 0.1\n    source: book\n    evidence: published\n")
                .substr(0, 64),
            std::string("models/data/test.yaml:5:18 species[0].temperature: 25 has no unit").substr(0, 64));
}

TEST(read_library, refuses_a_solid_that_its_reaction_does_not_dissolve) {
  const std::string rest =
      "    log10_k: -9.75\n    temperature: 25 degC\n    ionic_strength: 0 mol/kg\n    medium: dilute\n    spread: 0.05\n    source: book\n    evidence: published\n"
      "    density: 5560 kg/m3\n    density_source: book\n    density_evidence: published\n    forms: readily\n";
  EXPECT_EQ(faults_of("  - name: chlorargyrite\n    formula: AgCl\n    reaction: AgCl = Ag^+ + Cl^-\n" + rest, "solids"), "");
  EXPECT_EQ(faults_of("  - name: chlorargyrite\n    formula: AgCl\n    reaction: Ag^+ + Cl^- = AgCl\n" + rest, "solids"),
            "models/data/test.yaml:2:5 solids[0]: the reaction does not dissolve one AgCl");
}

}  // namespace
}  // namespace leat
