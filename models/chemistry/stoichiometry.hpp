#pragma once
#include <map>
#include <string>
#include <utility>
#include <vector>

#include "models/chemistry/species_library.hpp"

namespace leat {

// Something written as amounts of the library's components.
struct ComponentAmounts {
  std::map<std::string, double> amounts;                 // by component name, H2O and e^- included [1]
  std::vector<std::pair<std::string, double>> constants;  // names of library entries whose log K add up, with multiples
};

// Expands reaction terms (components, species, solids, gases, e^-) down to components, following the reactions of
// the library; `skip` is the name of the term that is being made. Returns false and says why in `fault`.
bool expand_terms(const SpeciesLibrary& library, const std::vector<ReactionTerm>& terms, const std::string& skip,
                  ComponentAmounts& out, std::string& fault);

// A component, species, solid or compound (NH4HCO3, CaO, CuSO4.5H2O) as components. Compounds the library does not
// list are taken apart into its ligands and metal ions; the oxidation state follows from neutrality.
bool components_of(const SpeciesLibrary& library, const std::string& name, ComponentAmounts& out, double& molar_mass,
                   std::string& fault);

}  // namespace leat
