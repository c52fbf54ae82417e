#pragma once
#include <map>
#include <memory>
#include <span>
#include <string>
#include <utility>
#include <vector>

#include "models/chemistry/activity_model.hpp"
#include "models/chemistry/liquor_volume.hpp"
#include "models/chemistry/species_library.hpp"
#include "models/chemistry/stoichiometry.hpp"
#include "models/core/diagnostics.hpp"

namespace leat {

// One term of a row of stoichiometry over the components.
struct Share {
  int component = 0;       // index; never water
  double coefficient = 0;  // [1]
};

// A dissolved species, or a phase, as a row over the components.
struct MassActionRow {
  std::string name;
  std::vector<Share> shares;  // components other than water
  double water = 0;           // coefficient of H2O [1]
  double charge = 0;          // [1]
  std::string family;         // free, ammine, chloro ... mixed
  std::vector<std::pair<int, double>> constants;  // which library constants make up log K, with their multiples
};

struct PhaseRow : MassActionRow {
  double molar_mass = 0;    // [kg/mol]
  double molar_volume = 0;  // [m3/mol]
  bool may_form = false;    // candidate precipitate; otherwise its saturation index alone is reported
  bool at_equilibrium = false;  // a fed mineral without a law: wholly in the balance
};

struct GasRow {
  std::string name;
  int species = -1;          // dissolved form
  double log10_k = 0;        // molality over pressure [atm] at 25 degC
  double slope = 0;          // d ln k_H / d(1/T) [K]
};

// A constant in use, kept with its provenance for the result file and for warnings.
struct UsedConstant {
  std::string name;          // of the species or phase it belongs to
  std::string reaction;      // as text
  EquilibriumConstant constant;
};

// A closed, compiled set: what can exist in this case. Components 0 .. n-1 are solved for; water stands last, at
// index n = component_count(). Immutable once compiled; shared by threads.
struct Chemistry {
  std::vector<std::string> component_names;   // water last
  std::vector<std::string> total_names;       // water last
  std::vector<double> component_charge;       // [1]
  std::vector<double> component_mass;         // [kg/mol]
  std::vector<ComponentRole> component_role;
  int hydrogen = -1;
  std::vector<MassActionRow> species;         // the free components first, in component order
  std::vector<PhaseRow> phases;
  std::vector<GasRow> gases;
  std::vector<UsedConstant> constants;
  std::vector<std::string> elements;
  std::vector<std::vector<double>> atoms;     // component x element [1]
  std::vector<std::string> families;          // in fixed order
  std::vector<DebyeHuckelRow> debye_huckel;
  double fixed_debye_huckel_a = 0;            // > 0: stated by the flowsheet, for a check against a published problem
  std::shared_ptr<const ActivityModel> activity;
  std::vector<ActivitySpecies> activity_species;
  LiquorVolume liquor_volume;

  int component_count() const { return static_cast<int>(component_names.size()) - 1; }  // without water
  int water() const { return component_count(); }
  int find_component(const std::string& name_or_total) const;  // -1 if absent; water too
  int find_species(const std::string& name) const;             // -1 if absent
  int find_phase(const std::string& name) const;               // -1 if absent
  int find_element(const std::string& name) const;             // -1 if absent
  int family_index(const std::string& name) const;

  double log10_k(const MassActionRow& row, double temperature) const;  // [log10]
  double debye_huckel_a(double temperature) const;                     // [kg^0.5 mol^-0.5]
  double henry(const GasRow& gas, double temperature) const;           // molality over pressure [mol/kg/Pa]
};

// What a case needs of the library.
struct ChemistryRequest {
  std::vector<std::string> components;          // names or totals that can occur; water and H are always there
  std::vector<std::string> families;            // empty: all
  std::vector<std::string> may_form;            // candidate solids
  bool may_form_given = false;                  // otherwise the library's readily formed ones
  std::vector<std::string> forms_slowly;        // index reported only
  std::vector<std::string> only;                // closed list of species and solids; empty: all
  std::vector<std::string> minerals;            // fed minerals, whose rows are needed
  std::vector<std::string> at_equilibrium;      // fed minerals without a law
  bool one_kg_water_per_litre = false;
  double fixed_debye_huckel_a = 0;
  std::shared_ptr<const ActivityModel> activity;
  std::map<std::string, Place> places;          // where names of the lists stand, for faults
};

// Compiles the set; faults (unknown names, a reaction that does not balance) go to `diagnostics`.
// Constants of the library may be overridden beforehand by changing a copy of it.
std::shared_ptr<const Chemistry> compile_chemistry(const SpeciesLibrary& library, const ChemistryRequest& request,
                                                   const Place& place, Diagnostics& diagnostics);

}  // namespace leat
