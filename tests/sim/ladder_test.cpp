// A ladder's results file: unions of what its cases have, missing where a case has none, constants, steps, stepped units.
#include "sim/results/ladder_layout.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <cstring>

#include "sim/results/ladder_liquor.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/result_tables.hpp"
#include "sim/results/stepped_input.hpp"

namespace leat {
namespace {

const double missing = std::nan("");

void put_constants(ResultSet& set, const std::vector<std::string>& names, const std::vector<double>& log10_k) {
  const std::size_t n = names.size();
  set.axes.push_back({"constant", "", "", names, {}, false});
  set.variables.push_back({"constant_log10_k", "", "1", {"constant"}, log10_k});
  for (const char* name : {"constant_temperature", "constant_ionic_strength", "constant_spread", "constant_enthalpy"})
    set.variables.push_back({name, "", "1", {"constant"}, std::vector<double>(n, missing)});
  for (const char* name : {"constant_reaction", "constant_key", "constant_source", "constant_evidence"}) set.texts.push_back({name, "", "constant", std::vector<std::string>(n, "x")});
}

// INVENTED numbers: two species of silver, sodium beside it. `silver`: what is dissolved of it in the second step [mol].
ResultSet a_beaker(double silver, double beta = 7.2) {
  ResultSet set;
  set.attributes = {{"leat_kind", "beaker"}};
  set.axes = {{"step", "", "1", {}, {1, 2, 3}, false}, {"species", "", "", {"Ag^+", "Ag(NH3)2^+", "NH3", "Na^+"}, {}, false}, {"component", "", "", {"Ag(I)", "NH3", "Na"}, {}, false},
              {"mineral", "", "", {"chlorargyrite"}, {}, false}, {"family", "", "", {"free", "ammine"}, {}, false}};
  set.variables = {{"ph", "", "1", {"step"}, {9, 10, 11}}, {"ionic_strength", "", "mol kg-1", {"step"}, {0.1, 0.2, 0.3}}, {"temperature", "", "K", {"step"}, {298, 299, 300}},
                   {"liquor_volume", "", "m3", {"step"}, {1e-3, 2e-3, 4e-3}}, {"molality", "", "mol kg-1", {"step", "species"}, {0.1, 0.3, 1, 1, 0.01, silver, 1, 1, 0, 0, 1, 1}},
                   {"dissolved", "", "mol", {"step", "component"}, {0.4, 1.6, 1, silver, 2, 1, 0, 1, 1}}, {"formed", "", "mol", {"step", "mineral"}, {0.01, 0.02, 0}},
                   {"saturation_index", "", "1", {"step", "mineral"}, {0, 0, -1}}, {"closure_cells", "", "1", {"step"}, {1e-15, 3e-14, 0}}, {"closure_mass_action", "", "1", {"step"}, {0, 0, 2e-14}},
                   {"species_content", "", "1", {"species", "component"}, {1, 0, 0, 1, 2, 0, 0, 1, 0, 0, 0, 1}}, {"component_mass", "", "kg mol-1", {"component"}, {0.108, 0.017, 0.023}}};
  set.texts = {{"step_name", "", "step", {"mixed", "taken up", "acidified"}}, {"species_family", "", "species", {"free", "ammine", "", ""}}, {"component_role", "", "component", {"metal", "ligand", "metal"}}};
  put_constants(set, {"Ag(NH3)2^+", "chlorargyrite"}, {beta, -9.75});
  check_result_set(set);
  return set;
}

// A vessel L, a thickener T, a splitter S; the pregnant liquor leaves the splitter. One metal, one reagent.
ResultSet a_run(double recovery) {
  ResultSet set;
  set.attributes = {{"leat_kind", "run"}, {"leat_pregnant_liquor", "S.product"}};
  set.axes = {{"time", "", "h", {}, {0}, true}, {"unit", "", "", {"W", "L"}, {}, false}, {"stream", "", "", {"ammonia", "L.pulp", "T.overflow", "S.product"}, {}, false},
              {"element", "", "", {"Ag"}, {}, false}, {"species", "", "", {"Ag(NH3)2^+", "AgCl2^-"}, {}, false}, {"component", "", "", {"Ag(I)", "Cl"}, {}, false},
              {"mineral", "", "", {"gypsum", "chlorargyrite"}, {}, false}, {"family", "", "", {"chloro", "ammine"}, {}, false}};
  set.variables = {{"steady_stream_ph", "", "1", {"stream"}, {1, 2, 3, 4}}, {"steady_stream_ionic_strength", "", "mol kg-1", {"stream"}, {0.1, 0.2, 0.3, 0.4}},
                   {"steady_pregnant_liquor_molality", "", "mol kg-1", {"species"}, {0.03, 0.01}}, {"steady_stream_dissolved", "", "mol s-1", {"stream", "component"}, {0, 0, 1, 1, 2, 2, 3, 30}},
                   {"steady_stream_liquor_flow", "", "m3 s-1", {"stream"}, {1, 4, 1, 0.5}}, {"steady_stream_formed", "", "mol s-1", {"stream", "mineral"}, {0, 0, 8, 2, 0, 0, 0, 0}},
                   {"steady_temperature", "", "K", {"unit"}, {280, 303}}, {"steady_saturation_index", "", "1", {"unit", "mineral"}, {9, 9, 0.5, -0.5}},
                   {"steady_recovery", "", "1", {"element"}, {recovery}}, {"steady_extraction", "", "1", {"element"}, {0.9}}, {"steady_formed_leaving", "", "1", {"element"}, {0.05}},
                   {"steady_recovery_by_family", "", "1", {"element", "family"}, {0.2, 0.6}}, {"reagent_consumption", "", "kg kg-1", {"stream"}, {0.04, missing, missing, missing}},
                   {"species_content", "", "1", {"species", "component"}, {1, 0, 1, 2}}, {"component_mass", "", "kg mol-1", {"component"}, {0.108, 0.035}}};
  for (const char* name : {"elements", "water", "mass", "charge", "mass_action", "cells"}) set.variables.push_back({std::string("steady_closure_") + name, "", "1", {}, {name == std::string("mass") ? 1e-12 : 0}});
  set.texts = {{"stream_from", "", "stream", {"", "L", "T", "S"}}, {"stream_to", "", "stream", {"L", "T", "S", ""}}, {"species_family", "", "species", {"ammine", "chloro"}},
               {"component_role", "", "component", {"metal", "ligand"}}};
  put_constants(set, {"Ag(NH3)2^+", "AgCl2^-"}, {7.2, 5.2});
  check_result_set(set);
  return set;
}

LadderSeries series(const std::string& name, const std::vector<std::string>& values, const std::vector<double>& numbers, const std::string& unit) {
  LadderSeries one;
  one.name = name;
  one.base = {name + ".yaml", name + ".yaml", "text of " + name, {}};
  one.vary = {"liquors." + name, values, numbers, unit, false, {}};
  return one;
}

LadderSpec a_spec(std::vector<LadderSeries> all) {
  LadderSpec spec;
  spec.title = "a ladder";
  spec.file = "folder/ladder.yaml";
  spec.text = "leat: 1\n";
  spec.series = std::move(all);
  return spec;
}

LadderRung solved(ResultSet set, std::vector<Caution> cautions = {}) { return {std::move(set), "solved", "", std::move(cautions)}; }
LadderRung fault(const std::string& why) { return {std::nullopt, "input_fault", why, {}}; }

double value(const ResultSet& set, const std::string& name) {
  std::string why;
  const auto found = find_value(set, name, why);
  EXPECT_TRUE(found) << why;
  return found ? found->value : -999;
}

TEST(Ladder, ABeakersStep) {
  LadderSpec spec = a_spec({series("NH3", {"1 mol/L", "2 mol/L"}, {1, 2}, "mol/L")});
  spec.step = "taken up";
  const ResultSet set = layout_of(spec, {{solved(a_beaker(0.03)), solved(a_beaker(0.07))}}, "leat 0");
  EXPECT_EQ(attribute(set, "leat_kind"), "ladder");
  EXPECT_EQ(attribute(set, "leat_ladder_of"), "beaker");
  EXPECT_EQ(attribute(set, "leat_stepped_path"), "liquors.NH3");
  EXPECT_EQ(value(set, "ph@rung 1"), 10);
  EXPECT_EQ(value(set, "temperature@rung 2"), 299);
  EXPECT_DOUBLE_EQ(value(set, "dissolved.Ag(I)@rung 2"), 0.07 / 2e-3);
  EXPECT_DOUBLE_EQ(value(set, "formed.chlorargyrite@rung 1"), 10);
  EXPECT_DOUBLE_EQ(value(set, "share.Ag(I).Ag(NH3)2^+@rung 1"), 0.75);
  EXPECT_DOUBLE_EQ(value(set, "family_share.Ag(I).ammine@rung 2"), 0.875);
  EXPECT_DOUBLE_EQ(value(set, "family_share.Ag(I).free@rung 2"), 0.125);
  EXPECT_TRUE(std::isnan(value(set, "share.NH3.NH3@rung 1")));  // no metal
  EXPECT_TRUE(std::isnan(value(set, "share.Na.Na^+@rung 1")));  // nobody asks
  EXPECT_DOUBLE_EQ(value(set, "closure@rung 1"), 3e-14);
  EXPECT_EQ(find_variable(set, "stepped")->units, "mol/L");
  EXPECT_EQ(find_variable(set, "stepped")->values, (std::vector<double>{1, 2}));
  EXPECT_EQ(axis_size(set, "element"), 0u);
  spec.step.clear();
  const ResultSet last = layout_of(spec, {{solved(a_beaker(0.03))}}, "leat 0", "stopped");
  EXPECT_EQ(value(last, "ph@rung 1"), 11);
  EXPECT_TRUE(std::isnan(value(last, "share.Ag(I).Ag^+@rung 1")));  // nothing is dissolved
  EXPECT_EQ(axis_size(last, "rung"), 1u);
  EXPECT_EQ(find_texts(last, "failure")->values[0], "stopped");
}

TEST(Ladder, ACircuitsPregnantLiquor) {
  const ResultSet set = layout_of(a_spec({series("a", {"1"}, {1}, "")}), {{solved(a_run(0.8))}}, "leat 0");
  EXPECT_EQ(attribute(set, "leat_ladder_of"), "run");
  EXPECT_EQ(value(set, "ph@rung 1"), 4);
  EXPECT_DOUBLE_EQ(value(set, "dissolved.Cl@rung 1"), 60);
  EXPECT_EQ(value(set, "temperature@rung 1"), 303);             // of L, behind the splitter and the thickener
  EXPECT_EQ(value(set, "saturation_index.gypsum@rung 1"), 0.5);
  EXPECT_DOUBLE_EQ(value(set, "formed.chlorargyrite@rung 1"), 0.5);
  EXPECT_EQ(value(set, "recovery.Ag@rung 1"), 0.8);
  EXPECT_EQ(value(set, "recovery_by_family.Ag.ammine@rung 1"), 0.6);
  EXPECT_EQ(value(set, "reagent_consumption.ammonia@rung 1"), 0.04);
  EXPECT_EQ(find_axis(set, "stream")->labels, std::vector<std::string>{"ammonia"});
  EXPECT_DOUBLE_EQ(value(set, "closure@rung 1"), 1e-12);
  ResultSet mixed = a_run(0.8);
  for (TextTable& table : mixed.texts)
    if (table.name == "stream_to") table.values = {"L", "S", "S", ""};  // two liquors meet last: none of them is it
  EXPECT_TRUE(std::isnan(liquor_of(mixed, "").temperature));
  EXPECT_TRUE(std::isnan(liquor_of(mixed, "").formed[0]));
}

TEST(Ladder, SeriesAreJoinedAndWhatTheyLackIsMissing) {
  const LadderSpec spec = a_spec({series("bench", {"1 mol/L", "2 mol/L"}, {1, 2}, "mol/L"), series("plant", {"500 mmol/L", "4000 mmol/L"}, {500, 4000}, "mmol/L")});
  const ResultSet set = layout_of(spec, {{solved(a_beaker(0.03)), fault("x.yaml:3:4 a fault")}, {solved(a_run(0.8)), solved(a_run(0.9))}}, "leat 0");
  EXPECT_EQ(attribute(set, "leat_ladder_of"), "mixed");
  EXPECT_EQ(find_texts(set, "series")->values, (std::vector<std::string>{"bench", "bench", "plant", "plant"}));
  EXPECT_EQ(find_texts(set, "status")->values[1], "input_fault");
  EXPECT_EQ(find_texts(set, "reason")->values[1], "x.yaml:3:4 a fault");
  EXPECT_EQ(find_axis(set, "mineral")->labels, (std::vector<std::string>{"chlorargyrite", "gypsum"}));
  EXPECT_EQ(find_axis(set, "component")->labels, (std::vector<std::string>{"Ag(I)", "NH3", "Na", "Cl"}));
  EXPECT_EQ(find_variable(set, "stepped")->values, (std::vector<double>{1, 2, 0.5, 4}));
  EXPECT_TRUE(std::isnan(value(set, "ph@rung 2")));
  EXPECT_TRUE(std::isnan(value(set, "recovery.Ag@rung 1")));
  EXPECT_TRUE(std::isnan(value(set, "dissolved.NH3@rung 3")));
  EXPECT_TRUE(std::isnan(value(set, "share.Ag(I).Ag^+@rung 3")));
  EXPECT_DOUBLE_EQ(value(set, "share.Ag(I).Ag(NH3)2^+@rung 3"), 0.75);
  EXPECT_EQ(value(set, "recovery.Ag@rung 4"), 0.9);
  EXPECT_EQ(find_texts(set, "ladder_base_text")->values, (std::vector<std::string>{"text of bench", "text of plant"}));
  EXPECT_NO_THROW(tables_of(set));
}

TEST(Ladder, TheOrderOfSeriesChangesNoNumber) {
  const LadderSeries a = series("bench", {"1 mol/L"}, {1}, "mol/L"), b = series("plant", {"2 mol/L"}, {2}, "mol/L");
  const ResultSet one = layout_of(a_spec({a, b}), {{solved(a_beaker(0.03))}, {solved(a_run(0.8))}}, "leat 0");
  const ResultSet two = layout_of(a_spec({b, a}), {{solved(a_run(0.8))}, {solved(a_beaker(0.03))}}, "leat 0");
  for (const Variable& variable : one.variables) {
    if (variable.axes.size() != 2 || variable.axes[0] != "rung") continue;
    for (const std::string& label : find_axis(one, variable.axes[1])->labels)
      for (const auto& [here, there] : {std::pair("@rung 1", "@rung 2"), std::pair("@rung 2", "@rung 1")}) {
        const double x = value(one, variable.name + "." + label + here), y = value(two, variable.name + "." + label + there);
        EXPECT_EQ(std::memcmp(&x, &y, sizeof x), 0) << variable.name << " " << label;
      }
  }
}

TEST(Ladder, ConstantsOnceUnlessTheyDiffer) {
  const LadderSpec spec = a_spec({series("bench", {"1"}, {1}, ""), series("other", {"1", "2"}, {1, 2}, ""), series("plant", {"1"}, {1}, "")});
  const auto labels = [&](double first, double second, double third) {
    return find_axis(layout_of(spec, {{solved(a_beaker(0.03, first))}, {solved(a_beaker(0.03, second)), solved(a_beaker(0.03, third))}, {solved(a_run(0.8))}}, "leat 0"), "constant")->labels;
  };
  EXPECT_EQ(labels(7.2, 7.2, 7.2), (std::vector<std::string>{"Ag(NH3)2^+", "chlorargyrite", "AgCl2^-"}));
  EXPECT_EQ(labels(7.2, 7.3, 7.3), (std::vector<std::string>{"Ag(NH3)2^+ (bench)", "chlorargyrite", "Ag(NH3)2^+ (other)", "AgCl2^-"}));
  EXPECT_EQ(labels(7.2, 7.3, 7.4), (std::vector<std::string>{"Ag(NH3)2^+ (bench)", "chlorargyrite", "Ag(NH3)2^+ (other, rung 2)", "Ag(NH3)2^+ (other, rung 3)", "AgCl2^-"}));
}

TEST(Ladder, CautionsOnceWithTheirRung) {
  const Caution both{"a", "", "the same", 1}, first{"b", "", "only here", 1}, second{"b", "", "worse there", 2};
  const ResultSet set = layout_of(a_spec({series("a", {"1", "2"}, {1, 2}, "")}), {{solved(a_run(0.8), {both, first}), solved(a_run(0.9), {both, both, second})}}, "leat 0");
  EXPECT_EQ(find_texts(set, "cautions")->values[0], "a: the same\nb: only here (rung 1)\nb: worse there (rung 2)\n");
  EXPECT_NE(find_texts(set, "cautions_in_short")->values[0].find("b: worse there (rung 2)"), std::string::npos);
}

TEST(Ladder, NothingSolvedIsStillAFile) {
  const ResultSet set = layout_of(a_spec({series("a", {"1", "2"}, {1, 2}, "")}), {{fault("x"), fault("y")}}, "leat 0");
  EXPECT_EQ(axis_size(set, "rung"), 2u);
  EXPECT_TRUE(std::isnan(value(set, "ph@rung 1")));
  EXPECT_NO_THROW(tables_of(set));
}

TEST(SteppedInput, UnitsOfTheFile) {
  const auto of = [](std::vector<LadderSeries> all) {
    const LadderSpec spec = a_spec(std::move(all));
    return SteppedInput(spec);
  };
  EXPECT_EQ(of({series("a", {"4 m3/h"}, {4}, "m3/h")}).udunits(), "m3/h");
  EXPECT_EQ(of({series("a", {"4 %"}, {4}, "%")}).as_typed(), "%");
  const SteppedInput molar = of({series("a", {"4 M"}, {4}, "M")});  // M is no molarity in the stock library
  EXPECT_EQ(molar.udunits(), "1");
  EXPECT_EQ(molar.as_typed(), "M");
  EXPECT_EQ(of({series("a", {"4"}, {4}, "")}).as_typed(), "1");
  const SteppedInput mixed = of({series("a", {"4 mol/L"}, {4}, "mol/L"), series("b", {"2 g/L"}, {2}, "g/L")});
  EXPECT_EQ(mixed.as_typed(), "mixed");
  EXPECT_EQ(mixed.udunits(), "1");
  EXPECT_EQ(mixed.number(series("b", {"2 g/L"}, {2}, "g/L").vary, 0), 2);
  const SteppedInput words = of({series("a", {"davies", "ideal"}, {}, "")});
  EXPECT_EQ(words.as_typed(), "1");
  EXPECT_EQ(words.number(series("a", {"davies", "ideal"}, {}, "").vary, 1), 2);
}

}  // namespace
}  // namespace leat
