// models/chemistry: formulas and reactions as text.
#include <gtest/gtest.h>

#include <cmath>

#include "models/chemistry/formula.hpp"

namespace leat {
namespace {

using Atoms = std::map<std::string, double>;

Formula read(std::string_view text) {
  std::string fault;
  const std::optional<Formula> formula = parse_formula(text, fault);
  EXPECT_TRUE(formula.has_value()) << text << ": " << fault;
  return formula.value_or(Formula{});
}

// Why a text is no formula, "" if it is one.
std::string refusal(std::string_view text) {
  std::string fault;
  return parse_formula(text, fault) ? "" : fault;
}

std::string reaction_refusal(std::string_view text) {
  std::string fault;
  return parse_reaction(text, fault) ? "" : fault;
}

TEST(formula, reads_atoms_and_charge) {
  struct Row {
    const char* text;
    Atoms atoms;
    double charge;
  };
  const Row rows[] = {
      {"H2O", {{"H", 2}, {"O", 1}}, 0},
      {"Ag^+", {{"Ag", 1}}, 1},
      {"Cl^-", {{"Cl", 1}}, -1},
      {"SO4^2-", {{"S", 1}, {"O", 4}}, -2},
      {"Fe^3+", {{"Fe", 1}}, 3},
      {"Ag(NH3)2^+", {{"Ag", 1}, {"N", 2}, {"H", 6}}, 1},
      {"Fe(CN)6^4-", {{"Fe", 1}, {"C", 6}, {"N", 6}}, -4},
      {"Zn(OH)2(NH3)2(aq)", {{"Zn", 1}, {"O", 2}, {"H", 8}, {"N", 2}}, 0},
      {"Ag4[Fe(CN)6]", {{"Ag", 4}, {"Fe", 1}, {"C", 6}, {"N", 6}}, 0},
      {"Fe4[Fe(CN)6]3", {{"Fe", 7}, {"C", 18}, {"N", 18}}, 0},
      {"Cu2(OH)2CO3", {{"Cu", 2}, {"O", 5}, {"H", 2}, {"C", 1}}, 0},
      {"CaSO4.2H2O", {{"Ca", 1}, {"S", 1}, {"O", 6}, {"H", 4}}, 0},
      {"CuSO4.5H2O", {{"Cu", 1}, {"S", 1}, {"O", 9}, {"H", 10}}, 0},
      {"CaSO3.0.5H2O", {{"Ca", 1}, {"S", 1}, {"O", 3.5}, {"H", 1}}, 0},
      {"CH3COO^-", {{"C", 2}, {"H", 3}, {"O", 2}}, -1},
      {"Ni4(OH)4^4+", {{"Ni", 4}, {"O", 4}, {"H", 4}}, 4},
      {"Co", {{"Co", 1}}, 0},
      {"CO", {{"C", 1}, {"O", 1}}, 0},
  };
  for (const Row& row : rows) {
    const Formula formula = read(row.text);
    EXPECT_EQ(formula.atoms, row.atoms) << row.text;
    EXPECT_EQ(formula.charge, row.charge) << row.text;
  }
}

TEST(formula, does_not_count_a_phase) {
  for (const char* text : {"AgCl(aq)", "AgCl(s)", "AgCl(am)", "AgCl(l)", "AgCl(g)", "AgCl(alpha)"}) EXPECT_EQ(read(text).atoms, (Atoms{{"Ag", 1}, {"Cl", 1}})) << text;
  EXPECT_EQ(read("NH3(g)").atoms, (Atoms{{"N", 1}, {"H", 3}}));
}

TEST(formula, knows_the_electron) {
  EXPECT_TRUE(read("e^-").atoms.empty());
  EXPECT_EQ(read("e^-").charge, -1);
}

TEST(formula, refuses_what_is_none) {
  EXPECT_EQ(refusal(""), "a formula is missing");
  EXPECT_EQ(refusal("ag^+"), "'ag^+' is not a formula: unexpected 'a'");
  EXPECT_EQ(refusal("Ag(NH3"), "'Ag(NH3' is not a formula: a bracket is not closed");
  EXPECT_EQ(refusal("Ag(NH3]2"), "'Ag(NH3]2' is not a formula: unexpected ']'");
  EXPECT_EQ(refusal("Ag)2"), "'Ag)2' is not a formula: unexpected ')'");
  EXPECT_EQ(refusal("Ag^"), "'Ag^' is not a formula: no charge after '^'");
  EXPECT_EQ(refusal("Ag^2"), "'Ag^2' is not a formula: a charge ends in + or -, as in ^2-");
  EXPECT_EQ(refusal("Ag^x+"), "'Ag^x+' is not a formula: the charge is a digit and a sign, as in ^2-");
  EXPECT_EQ(refusal("Ag^+2"), "'Ag^+2' is not a formula: a charge ends in + or -, as in ^2-");
  EXPECT_EQ(refusal("^2-"), "'^2-' is not a formula: no element found");
  EXPECT_EQ(refusal("25"), "'25' is not a formula: a part of it has no element");
  EXPECT_EQ(refusal("Ag Cl"), "'Ag Cl' is not a formula: unexpected ' '");
  EXPECT_EQ(refusal("AgCl(xx)"), "'AgCl(xx)' is not a formula: unexpected 'x'");
  EXPECT_EQ(refusal("Ag+"), "'Ag+' is not a formula: unexpected '+'");
  EXPECT_EQ(refusal("Ag\xC2\xB2"), "'Ag\xC2\xB2' is not a formula: unexpected '\xC2'");
}

// Whatever is typed, a charge is a small whole number and a count is positive.
TEST(formula, refuses_strange_numbers) {
  for (const char* text : {"Ag^inf+", "Ag^nan+", "Ag^-1+", "Ag^0+", "Ag^0.5+", "Ag^1e3+", "Ag0", "H2O0", "Ag()", "Ag.", ".AgCl", "Ag..Cl"})
    EXPECT_NE(refusal(text), "") << text;
}

TEST(reaction, counts_products_positive) {
  std::string fault;
  const auto terms = parse_reaction("Ag^+ + 2 NH3 = Ag(NH3)2^+", fault);
  ASSERT_TRUE(terms.has_value()) << fault;
  ASSERT_EQ(terms->size(), 3u);
  EXPECT_EQ((*terms)[0].name, "Ag^+");
  EXPECT_EQ((*terms)[0].coefficient, -1);
  EXPECT_EQ((*terms)[1].name, "NH3");
  EXPECT_EQ((*terms)[1].coefficient, -2);
  EXPECT_EQ((*terms)[2].name, "Ag(NH3)2^+");
  EXPECT_EQ((*terms)[2].coefficient, 1);
  const auto half = parse_reaction("  O2 + 4 H^+ + 4 e^-   =  2 H2O ", fault);
  ASSERT_TRUE(half.has_value()) << fault;
  EXPECT_EQ((*half)[2].name, "e^-");
  EXPECT_EQ((*half)[2].coefficient, -4);
  EXPECT_EQ((*half)[3].coefficient, 2);
  const auto fraction = parse_reaction("0.5 O2 = O", fault);
  ASSERT_TRUE(fraction.has_value()) << fault;
  EXPECT_EQ(fraction->front().coefficient, -0.5);
}

TEST(reaction, refuses_what_is_none) {
  EXPECT_EQ(reaction_refusal(""), "a reaction has one '=' sign");
  EXPECT_EQ(reaction_refusal("Ag^+ + Cl^-"), "a reaction has one '=' sign");
  EXPECT_EQ(reaction_refusal("A = B = C"), "a reaction has one '=' sign");
  EXPECT_EQ(reaction_refusal(" = AgCl"), "a term is missing in the reaction");
  EXPECT_EQ(reaction_refusal("AgCl = "), "a term is missing in the reaction");
  EXPECT_EQ(reaction_refusal("Ag^+ +  + Cl^- = AgCl"), "a term is missing in the reaction");
  EXPECT_EQ(reaction_refusal("x NH3 = N"), "'x NH3' is not a coefficient, a space and a name");
  EXPECT_EQ(reaction_refusal("0 NH3 = N"), "'0 NH3' is not a coefficient, a space and a name");
  EXPECT_EQ(reaction_refusal("-1 NH3 = N"), "'-1 NH3' is not a coefficient, a space and a name");
  EXPECT_EQ(reaction_refusal("nan NH3 = N"), "'nan NH3' is not a coefficient, a space and a name");
  EXPECT_NE(reaction_refusal("inf NH3 = inf NH3"), "");
}

}  // namespace
}  // namespace leat
