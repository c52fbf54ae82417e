// find_value: one number of a results file by its name.
#include "sim/results/result_access.hpp"

#include <gtest/gtest.h>

#include <cmath>

namespace leat {
namespace {

// INVENTED numbers. Labels hold points, one is the beginning of another.
ResultSet a_run() {
  ResultSet set;
  set.attributes = {{"leat_kind", "run"}};
  set.axes = {{"time", "", "h", {}, {0, 0.1, 12, 48}, true},        {"unit", "", "", {"L", "L.1", "make_up"}, {}, false},
              {"element", "", "", {"Ag", "Cu"}, {}, false},          {"family", "", "", {"free", "ammine"}, {}, false},
              {"species", "", "", {"1.x", "x", "Ag(NH3)2^+"}, {}, false}, {"stream", "", "", {"ammonia", "split.product"}, {}, false}};
  set.variables = {{"recovery", "metal recovered", "1", {"time", "element"}, {0, 1, 2, 3, 4, 5, 6, 7}},
                   {"steady_recovery", "the same at rest", "1", {"element"}, {10, 11}},
                   {"recovery_by_family", "", "1", {"time", "element", "family"}, {0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15}},
                   {"molality", "", "mol kg-1", {"unit", "species"}, {0, 1, 2, 3, 4, 5, 6, 7, 8}},
                   {"reagent_consumption", "", "kg kg-1", {"stream"}, {0.3, std::nan("")}},
                   {"recovery_to_date", "", "1", {"time", "element"}, {0, 1, 2, 3, 4, 5, 6, 7}},
                   {"newton_iterations", "", "1", {}, {4}}};
  set.flags = {{"may_form", "", {"element"}, {0, 1}, {"no", "yes"}}};
  set.texts = {{"input_text", "", "", {"x"}}};
  check_result_set(set);
  return set;
}

ResultSet a_beaker() {
  ResultSet set;
  set.attributes = {{"leat_kind", "beaker"}};
  set.axes = {{"step", "", "1", {}, {1, 2, 3}, false}, {"component", "", "", {"Ag(I)", "NH3"}, {}, false}};
  set.variables = {{"dissolved", "", "mol", {"step", "component"}, {1, 2, 3, 4, 5, 6}}, {"ph", "", "1", {"step"}, {9, 8, 7}}};
  set.texts = {{"step_name", "", "step", {"taken up", "filtered", "warmed @ 60"}}};
  return set;
}

double value(const ResultSet& set, const std::string& name) {
  std::string fault;
  const auto found = find_value(set, name, fault);
  EXPECT_TRUE(found) << name << ": " << fault;
  return found ? found->value : -999;
}

std::string fault_of(const ResultSet& set, const std::string& name) {
  std::string fault;
  EXPECT_FALSE(find_value(set, name, fault)) << name;
  EXPECT_NE(fault.find(name), std::string::npos) << fault;
  return fault;
}

TEST(FindValue, theSteadyTwinGoesFirst) {
  EXPECT_EQ(value(a_run(), "recovery.Ag"), 10);
  EXPECT_EQ(value(a_run(), "steady_recovery.Cu"), 11);
  EXPECT_EQ(value(a_run(), "recovery.Ag@last"), 6);
  EXPECT_EQ(value(a_run(), "recovery_to_date.Ag"), 6);
  EXPECT_EQ(value(a_run(), "recovery_by_family.Cu.ammine"), 15);
}

TEST(FindValue, momentsAreStoredTimes) {
  EXPECT_EQ(value(a_run(), "recovery.Cu@12 h"), 5);
  EXPECT_EQ(value(a_run(), "recovery.Cu@720 min"), 5);
  EXPECT_EQ(value(a_run(), "recovery.Cu@6 min"), 3);
  EXPECT_EQ(value(a_run(), "recovery.Cu@0 h"), 1);
  EXPECT_NE(fault_of(a_run(), "recovery.Cu@11.99 h").find("the nearest is 12 h"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery.Cu@12").find("such as 12 h"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery.Cu@3 kg").find("such as 12 h"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery.Cu@").find("moment is missing"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery.Cu@1e308 a").find("1e308"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "reagent_consumption.ammonia@12 h").find("leave '@12 h' out"), std::string::npos);
}

TEST(FindValue, labelsHoldPoints) {
  EXPECT_EQ(value(a_run(), "molality.L.1.x"), 4);                 // L.1 and x; not L and 1.x
  EXPECT_EQ(value(a_run(), "molality.L.1.1.x"), 3);
  EXPECT_EQ(value(a_run(), "molality.L.x"), 1);
  EXPECT_EQ(value(a_run(), "molality.make_up.Ag(NH3)2^+"), 8);
  EXPECT_EQ(value(a_run(), "newton_iterations"), 4);
  EXPECT_EQ(value(a_run(), "reagent_consumption.ammonia"), 0.3);
  EXPECT_TRUE(std::isnan(value(a_run(), "reagent_consumption.split.product")));
}

TEST(FindValue, unitsComeWithIt) {
  std::string fault;
  const auto found = find_value(a_run(), "recovery.Ag@last", fault);
  ASSERT_TRUE(found);
  EXPECT_EQ(found->units, "1");
  EXPECT_EQ(found->long_name, "metal recovered");
}

TEST(FindValue, aBeakersSteps) {
  EXPECT_EQ(value(a_beaker(), "dissolved.Ag(I)"), 5);
  EXPECT_EQ(value(a_beaker(), "dissolved.Ag(I)@filtered"), 3);
  EXPECT_EQ(value(a_beaker(), "ph@taken up"), 9);
  EXPECT_EQ(value(a_beaker(), "ph@last"), 7);
  EXPECT_NE(fault_of(a_beaker(), "ph@takenup").find("did you mean 'taken up'?"), std::string::npos);
}

TEST(FindValue, faultsNameTheNearest) {
  EXPECT_NE(fault_of(a_run(), "recovry.Ag").find("did you mean 'recovery'?"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery.AG").find("did you mean 'Ag'?"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery").find("label of the axis element is missing; it has: Ag, Cu"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery.Ag.ammine").find("left over"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "recovery_by_family.Ag.amine").find("did you mean 'ammine'?"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "may_form.Ag").find("a flag"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "input_text").find("a text"), std::string::npos);
  EXPECT_NE(fault_of(a_run(), "element").find("an axis"), std::string::npos);
  for (const std::string name : {"", ".", "@", "recovery.", "recovery..Ag", "recovery.Ag.", ".Ag", "recovery.Ag@@last", "recovery@last", "zzzz"}) fault_of(a_run(), name);
}

}  // namespace
}  // namespace leat
