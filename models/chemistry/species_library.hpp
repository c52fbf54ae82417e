#pragma once
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "models/chemistry/formula.hpp"
#include "models/core/place.hpp"

namespace leat {

// Where a number comes from; nothing enters the library without it.
struct Provenance {
  std::string source;    // key in sources.yaml, or the user's own words
  std::string where;     // table or page
  std::string evidence;  // published | derived | from memory | common practice, no source | the user's own
  std::string note;
  bool user = false;     // given in the flowsheet: shown as the user's own everywhere
};

// A decadic equilibrium constant as measured, with what is needed to move it to another temperature.
struct EquilibriumConstant {
  double log10_k = 0;                // of the reaction as written [log10]
  double temperature = 298.15;       // where it was measured [K]
  double ionic_strength = 0;         // where it was measured [mol/kg]
  std::string medium;                // background electrolyte, or dilute
  double spread = 0.3;               // half-width of the published values [log10]
  bool spread_assigned = false;      // no published spread: 0.3 assigned
  std::optional<double> enthalpy;    // of the reaction as written [J/mol]
  std::vector<std::pair<double, double>> also_at;  // measured at other temperatures: [K], [log10]
  Provenance provenance;
};

// Between temperatures at which it was measured: linear in 1/T (van 't Hoff between neighbours). Beyond them, from the
// nearest, van 't Hoff at constant enthalpy: log10 K(T) = log10 K(T0) - dH/(R ln 10) (1/T - 1/T0). Without an enthalpy
// the nearest measured value is used. temperature [K].
double log10_k_at(const EquilibriumConstant& constant, double temperature);

enum class ComponentRole { water, proton, metal, ligand, gas };

struct ComponentEntry {
  std::string name;           // species that stands for it, e.g. Ag^+
  std::string total_name;     // name of all its forms together, e.g. Ag(I), NH3, Cl
  std::string element_state;  // for metals: Ag(I)
  std::string family;         // for ligands: the family of complexes it makes
  ComponentRole role = ComponentRole::ligand;
  Formula formula;
};

struct SpeciesEntry {
  std::string name;
  Formula formula;
  std::vector<ReactionTerm> reaction;  // makes one of `name`
  EquilibriumConstant constant;
  std::string family;  // only where ligands do not tell it (carbamato)
  Place place;
};

// A solid: with a reaction and constant (it can dissolve to saturation or form), or without (a rate law or inert only).
struct SolidEntry {
  std::string name;  // mineral name, or formula
  std::string formula_text;
  Formula formula;
  std::vector<ReactionTerm> reaction;              // dissolves one formula unit; empty where there is no constant
  std::optional<EquilibriumConstant> constant;
  std::vector<ReactionTerm> dissolves_as;          // half-reaction with e^-, for metals and sulfides
  double density = 0;                              // [kg/m3]
  Provenance density_provenance;
  bool forms_readily = false;                      // may precipitate unless the flowsheet says otherwise
  Place place;
};

// Solubility of a gas: c = k_H p.
struct GasEntry {
  std::string name;                    // NH3(g)
  std::vector<ReactionTerm> reaction;  // gas = dissolved species
  double log10_k = 0;                  // at 25 degC, molality over pressure in atmospheres [log10]
  double slope = 0;                    // d ln k_H / d(1/T) [K]
  Provenance provenance;
  std::string species;                 // the dissolved form whose molality it follows
};

// One salt of the Laliberte and Cooper (2004) density correlation.
struct DensitySalt {
  std::string name;
  Formula formula;
  double c[5] = {};
  Provenance provenance;
};

// Exposure limit in air.
struct AirLimit {
  std::string substance, kind, body, year, evidence;
  double ppm = 0;  // by volume [ppm]
};

struct DebyeHuckelRow {
  double temperature = 0;  // [K]
  double a = 0;            // A of log10 gamma on the molal scale [kg^0.5/mol^0.5]
};

// Everything models/data holds, checked and with references resolved by name.
struct SpeciesLibrary {
  std::map<std::string, std::string> sources;        // key -> citation
  std::map<std::string, double> atomic_weights;      // [kg/mol]
  std::vector<ComponentEntry> components;
  std::vector<SpeciesEntry> species;
  std::vector<SolidEntry> solids;
  std::vector<GasEntry> gases;
  std::map<std::string, std::vector<ReactionTerm>> couples;  // `O2`, `CN^- to OCN^-`: half-reactions with e^-
  std::vector<DensitySalt> density_salts;
  std::map<std::string, double> ionic_volumes;       // conventional, V(H+) = 0 [m3/mol]
  std::vector<DebyeHuckelRow> debye_huckel;          // ascending temperature
  double water_vapour[3] = {0, 0, 0};                // a, b, c of ln(p/atm) = a + b (100/T) + c ln(T/100)
  std::vector<AirLimit> air_limits;

  const ComponentEntry* component(const std::string& name_or_total) const;
  const SpeciesEntry* find_species(const std::string& name) const;
  const SolidEntry* find_solid(const std::string& name_or_formula) const;
  // Vapour pressure of pure water, Weiss and Price (1980) [Pa]; temperature [K].
  double water_vapour_pressure(double temperature) const;
  // Molar mass of a formula [kg/mol]; throws std::out_of_range for an element without atomic weight.
  double molar_mass(const Formula& formula) const;
};

}  // namespace leat
