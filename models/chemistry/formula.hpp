#pragma once
#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace leat {

// What a chemical formula is made of.
struct Formula {
  std::map<std::string, double> atoms;  // atoms of each element in one formula unit [1]
  double charge = 0;                    // charge number [1]
};

// One side's entry of a reaction: products count positive, reactants negative.
struct ReactionTerm {
  std::string name;        // as written: a component, species, solid formula, gas or e^-
  double coefficient = 0;  // stoichiometric coefficient [1]
};

// Reads `Ag(NH3)2^+`, `SO4^2-`, `CaSO4.2H2O`, `Ag4[Fe(CN)6]`, `AgCl(aq)`, `NH3(g)`, `e^-`: a caret
// stands before the charge, digits before its sign. A phase suffix (aq, s, g, am ...) is not counted.
// Returns nothing, and the reason in `fault`, if the text is not a formula.
std::optional<Formula> parse_formula(std::string_view text, std::string& fault);

// Reads `Ag^+ + 2 NH3 = Ag(NH3)2^+`. Returns nothing, and the reason in `fault`, otherwise.
std::optional<std::vector<ReactionTerm>> parse_reaction(std::string_view text, std::string& fault);

}  // namespace leat
