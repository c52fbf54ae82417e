// The sentence that varies an input, lists, ladder and campaign files, tables of cases.
#include "sim/input/read_study.hpp"

#include <fmt/format.h>
#include <gtest/gtest.h>

#include <cmath>
#include <filesystem>
#include <fstream>
#include <random>

#include "models/core/quantity.hpp"
#include "sim/input/case_table.hpp"
#include "sim/input/read_flowsheet.hpp"

namespace leat {
namespace {

const Place here{"--vary", 0, 0, ""};

std::optional<VariedInput> varied(const std::string& sentence) {
  Diagnostics diagnostics;
  auto out = read_varied(sentence, here, diagnostics);
  EXPECT_TRUE(diagnostics.ok()) << (diagnostics.ok() ? "" : diagnostics.faults()[0].text);
  return out;
}

std::string refusal(const std::string& sentence) {
  Diagnostics diagnostics;
  EXPECT_FALSE(read_varied(sentence, here, diagnostics)) << sentence;
  return diagnostics.faults().empty() ? "" : diagnostics.faults()[0].text;
}

using Words = std::vector<std::string>;

TEST(Varied, aRangeWithItsUnitAtBothEndsOrTheLast) {
  const auto a = varied("liquors.strong.NH3: 0.5 mol/L to 6 mol/L in 12 points");
  ASSERT_TRUE(a);
  EXPECT_EQ(a->path, "liquors.strong.NH3");
  EXPECT_EQ(a->unit, "mol/L");
  EXPECT_FALSE(a->logarithmic);
  EXPECT_EQ(a->values, (Words{"0.5 mol/L", "1 mol/L", "1.5 mol/L", "2 mol/L", "2.5 mol/L", "3 mol/L", "3.5 mol/L", "4 mol/L", "4.5 mol/L", "5 mol/L", "5.5 mol/L", "6 mol/L"}));
  EXPECT_EQ(varied("a = 0.5 to 6 mol/L in 12 points")->values, a->values);
  EXPECT_EQ(varied("  a  :0.50 to  6  mol/L   in  12   points  ")->values, a->values);
}

TEST(Varied, otherUnitsAndNone) {
  EXPECT_EQ(varied("a: 20 degC to 60 degC in 3 points")->values, (Words{"20 degC", "40 degC", "60 degC"}));
  EXPECT_EQ(varied("a: -0.3 to 0.6 in 10 points")->values, (Words{"-0.3", "-0.2", "-0.1", "0", "0.1", "0.2", "0.3", "0.4", "0.5", "0.6"}));
  EXPECT_EQ(varied("a: 9 to 3 in 3 points")->values, (Words{"9", "6", "3"}));
  EXPECT_EQ(varied("a: 8 % to 10 % in 2 points")->values, (Words{"8 %", "10 %"}));
  EXPECT_EQ(varied("a: 8% to 10% in 2 points")->values, (Words{"8 %", "10 %"}));
  EXPECT_EQ(varied("a: 200 to 600 mg/L as NaCN in 3 points")->values, (Words{"200 mg/L as NaCN", "400 mg/L as NaCN", "600 mg/L as NaCN"}));
}

TEST(Varied, logarithmicPoints) {
  const auto a = varied("a: 0.01 g/L to 1 g/L in 5 logarithmic points");
  ASSERT_TRUE(a);
  EXPECT_TRUE(a->logarithmic);
  EXPECT_EQ(a->values, (Words{"0.01 g/L", "0.0316 g/L", "0.1 g/L", "0.316 g/L", "1 g/L"}));
}

TEST(Varied, lists) {
  EXPECT_EQ(varied("a: [2, 3, 4]")->values, (Words{"2", "3", "4"}));
  EXPECT_EQ(varied("a: [2, 3, 4]")->numbers, (std::vector<double>{2, 3, 4}));
  EXPECT_EQ(varied("a: [davies, ideal]")->values, (Words{"davies", "ideal"}));
  EXPECT_TRUE(varied("a: [davies, ideal]")->numbers.empty());
  const auto mixed = varied("a: [500 mmol/L, 1 mol/L]");
  EXPECT_EQ(mixed->unit, "mmol/L");
  EXPECT_DOUBLE_EQ(mixed->numbers[1], 1000);
  EXPECT_TRUE(varied("a: [1 m3, 1 kg]")->numbers.empty());
  EXPECT_TRUE(varied("a: [1 g/L as NaCN, 1 g/L]")->numbers.empty());
  EXPECT_EQ(varied("a: ['x, y', \"z\"]")->values, (Words{"x, y", "z"}));
}

TEST(Varied, everyFaultSaysWhatIsAllowedWithAnExample) {
  const std::vector<std::pair<std::string, std::string>> rows = {
      {"a: 4 mol/L", "is one value"}, {"a: 1 to 2 mol/L", "how many points"}, {"a: 1 mol/L in 4 points", "has no 'to'"},
      {"a: 1 to 2 in 1 points", "allowed is 2 to 10000"}, {"a: 1 to 2 in 10001 points", "allowed is 2 to 10000"}, {"a: 1 to 2 in 0 points", "allowed is 2"},
      {"a: 1 to 2 in 99999999999999999999 points", "allowed is 2"}, {"a: 1 to 2 in -3 points", "allowed is 2"}, {"a: 1 to 2 in 3.5 points", "whole number"},
      {"a: 1 to 2 in three points", "whole number"}, {"a: 1 to 2 in points", "whole number"}, {"a: 1 to 2 in 3 steps", "in N points"}, {"a: 1 to 2 in 3 log points", "in N logarithmic points"},
      {"a: 1 to 2 in 3", "in N points"}, {"a: 0 to 2 in 3 logarithmic points", "above 0"}, {"a: -1 to 2 in 3 logarithmic points", "above 0"},
      {"a: 1 mol/L to 2 in 3 points", "two units"}, {"a: 500 mmol/L to 2 mol/L in 3 points", "two units"}, {"a: 1 to 2 moles in 3 points", "'moles'"},
      {"a: 1 to 2 ton in 3 points", "write t"}, {"a: one to 2 in 3 points", "does not start with a number"}, {"a: 1,5 to 2 in 3 points", "comma"},
      {"a: 2 to 2 in 3 points", "starts where it ends"}, {"a: nan to 2 in 3 points", "number"}, {"a: 1 to inf in 3 points", "number"}, {"a: 010 to 20 in 3 points", "leading zero"},
      {"a:", "nothing to vary"}, {"a: ", "nothing to vary"}, {"a: []", "the list is empty"}, {"a: [1, 1]", "twice"}, {"a: [1, [2]]", "a text is needed"}, {"a: [1, 2", "not closed"},
      {"a 1 to 2 in 3 points", "names no input"}, {": 1 to 2 in 3 points", "names no input"}, {"", "names no input"}, {"a: 1 to 1.0000000000000002 in 9 points", "too close"},
      {"a: 1 g/L as NaCN to 2 g/L in 3 points", "two units"}, {"a: \xFF to 2 in 3 points", "UTF-8"}, {"a: 1 to 2 to 3 in 4 points", "2 to 3"}};
  for (const auto& [sentence, piece] : rows) EXPECT_NE(refusal(sentence).find(piece), std::string::npos) << sentence << " -> " << refusal(sentence);
}

TEST(Varied, numbersAndTextsAgreeAndTheEndsAreExact) {
  std::mt19937_64 random(11);
  for (int round = 0; round < 3000; ++round) {
    const double from = std::ldexp(static_cast<double>(random() % 1000000 + 1), static_cast<int>(random() % 60) - 40);
    const double to = round % 3 == 0 ? from * (1 + 1e-6 * static_cast<double>(random() % 1000000 + 1)) : std::ldexp(static_cast<double>(random() % 1000000 + 1), static_cast<int>(random() % 60) - 40);
    if (from == to) continue;
    const bool logarithmic = random() % 2;
    const int count = 2 + static_cast<int>(random() % 40);
    const auto a = varied(fmt::format("a: {} to {} g/L in {}{} points", from, to, count, logarithmic ? " logarithmic" : ""));
    ASSERT_TRUE(a);
    ASSERT_EQ(a->values.size(), static_cast<std::size_t>(count));
    ASSERT_EQ(a->numbers.size(), a->values.size());
    EXPECT_EQ(a->numbers.front(), from);
    EXPECT_EQ(a->numbers.back(), to);
    for (std::size_t k = 0; k < a->values.size(); ++k) {
      const auto reading = parse_quantity(a->values[k]);
      ASSERT_TRUE(reading.ok) << a->values[k];
      EXPECT_EQ(reading.quantity.number, a->numbers[k]);
      EXPECT_EQ(reading.quantity.unit, "g/L");
      EXPECT_TRUE(k == 0 || ((a->numbers[k] > a->numbers[k - 1]) == (to > from) && a->numbers[k] != a->numbers[k - 1]));
      const double share = static_cast<double>(k) / (count - 1);
      const double exact = logarithmic ? from * std::pow(to / from, share) : from + (to - from) * share;
      const double step = logarithmic ? exact * std::expm1(std::abs(std::log(to / from)) / (count - 1)) : std::abs(to - from) / (count - 1);
      EXPECT_NEAR(a->numbers[k], exact, 1.01e-3 * step + 1e-15 * std::max(from, to));
    }
  }
}

TEST(Varied, randomBytesNeverCrash) {
  std::mt19937 random(3);
  const std::vector<std::string> pieces = {"a", ":", "=", " ", " to ", " in ", "points", "logarithmic", "1", "0.5", "-", "mol/L", "%", "[", "]", ",", "1e308", "1e-308", "9999999999", "as", "NaCN",
                                           "\n", "\"", "'", "\xC2\xB5", "\xFF", std::string("\0", 1), "to", "in", "degC", "."};
  for (int round = 0; round < 30000; ++round) {
    std::string sentence = random() % 3 ? "a: 1 to 2 g/L in 5 points" : "";
    for (unsigned n = random() % 12; n > 0; --n) {
      const std::string piece = random() % 4 ? pieces[random() % pieces.size()] : std::string(1, static_cast<char>(random() % 256));
      const std::size_t at = random() % (sentence.size() + 1);
      if (random() % 3 == 0 && at < sentence.size()) sentence.erase(at, 1 + random() % 3);
      else sentence.insert(at, piece);
    }
    Diagnostics diagnostics;
    const auto out = read_varied(sentence, here, diagnostics);
    EXPECT_EQ(out.has_value(), diagnostics.ok()) << sentence;
    EXPECT_TRUE(!out || out->numbers.empty() || out->numbers.size() == out->values.size());
  }
}

// Files --------------------------------------------------------------------------------------------------------------

class StudyFiles : public ::testing::Test {
 protected:
  void SetUp() override {
    folder_ = std::filesystem::path(::testing::TempDir()) / ("leat_study_" + std::string(::testing::UnitTest::GetInstance()->current_test_info()->name()));
    std::filesystem::create_directories(folder_);
    put("beaker.yaml", "leat: 1\nkind: beaker\ntitle: one\nbeaker:\n  liquor: {NH3: 4 mol/L, CuSO4.5H2O: 1 g/L}\n  temperature: 25 degC\nsteps:\n- {name: taken up}\n- {name: warmed, heat_to: 60 degC}\n");
    put("circuit.yaml", "leat: 1\nkind: flowsheet\nstreams: {wash: {liquor: water, rate: 4 m3/h}}\ncircuit: {L: {unit: train, tanks: 3}}\n");
    put("ladder.yaml", "leat: 1\nkind: ladder\nof: beaker.yaml\nvary: {beaker.liquor.NH3: 1 to 2 mol/L in 2 points}\n");
    put("broken.yaml", "leat: 1\nkind: [\n");
    std::filesystem::create_directories(folder_ / "folder.yaml");
  }
  void TearDown() override { std::filesystem::remove_all(folder_); }

  void put(const std::string& name, const std::string& text) { std::ofstream(folder_ / name, std::ios::binary) << text; }
  std::string path(const std::string& name) const { return (folder_ / name).string(); }

  std::optional<LadderSpec> ladder(const std::string& body, std::string* fault = nullptr) {
    Diagnostics diagnostics;
    auto out = read_ladder("leat: 1\nkind: ladder\n" + body, path("study.yaml"), diagnostics);
    EXPECT_EQ(out.has_value(), diagnostics.ok());
    if (fault) *fault = told(diagnostics);
    else EXPECT_TRUE(diagnostics.ok()) << told(diagnostics);
    return out;
  }
  std::optional<CampaignSpec> campaign(const std::string& body, std::string* fault = nullptr) {
    Diagnostics diagnostics;
    auto out = read_campaign("leat: 1\nkind: campaign\n" + body, path("study.yaml"), diagnostics);
    EXPECT_EQ(out.has_value(), diagnostics.ok());
    if (fault) *fault = told(diagnostics);
    else EXPECT_TRUE(diagnostics.ok()) << told(diagnostics);
    return out;
  }
  static std::string told(const Diagnostics& diagnostics) {
    std::string text;
    for (const Diagnostic& one : diagnostics.sorted_faults()) text += to_string(one) + "\n";
    return text;
  }

  std::filesystem::path folder_;
};

TEST_F(StudyFiles, aLadderOfOneCase) {
  const auto a = ladder("title: t\nof: beaker.yaml\nvary: {beaker.liquor.CuSO4.5H2O: 1 g/L to 3 g/L in 3 points}\nstep: taken up\n");
  ASSERT_TRUE(a);
  ASSERT_EQ(a->series.size(), 1u);
  EXPECT_EQ(a->series[0].name, "beaker");
  EXPECT_EQ(a->series[0].base.path, path("beaker.yaml"));
  EXPECT_EQ(a->series[0].vary.path, "beaker.liquor.CuSO4.5H2O");
  EXPECT_EQ(a->series[0].vary.values.size(), 3u);
  EXPECT_EQ(a->series[0].vary.place.line, 5);
  EXPECT_EQ(a->step, "taken up");
}

TEST_F(StudyFiles, aLadderOfSeries) {
  const auto a = ladder("series:\n  weak: {of: beaker.yaml, vary: {beaker.liquor.NH3: [1 mol/L, 2 mol/L]}}\n  washed: {of: circuit.yaml, vary: {streams.wash.rate: 1 to 2 m3/h in 4 points}}\n");
  ASSERT_TRUE(a);
  EXPECT_EQ(a->series[0].name, "weak");
  EXPECT_EQ(a->series[1].name, "washed");
  EXPECT_EQ(a->series[1].vary.values.size(), 4u);
}

TEST_F(StudyFiles, laddersThatAreRefused) {
  const std::string of = "of: beaker.yaml\n", vary = "vary: {beaker.liquor.NH3: 1 to 2 mol/L in 2 points}\n";
  const std::vector<std::pair<std::string, std::string>> rows = {
      {vary, "'of' is needed"}, {of, "'vary' is needed"}, {of + "vary: {}\n", "0 inputs"}, {of + "vary: {beaker.liquor.NH3: [1], beaker.temperature: [2 degC]}\n", "a ladder steps one"},
      {of + "vary: 3\n", "a map of"}, {of + "vary: {beaker.liquor.NH4: 1 to 2 mol/L in 2 points}\n", "did you mean 'NH3'?"}, {of + "vary: {beaker.liquor: [1]}\n", "such as beaker.liquor.NH3"},
      {of + "vary: {beaker: {liquor: {NH3: 1 to 2 in 2 points}}}\n", "write its path with points"}, {of + "vary: {beaker.liquor.NH3: 4 mol/L}\n", "is one value"},
      {"of: gone.yaml\n" + vary, "cannot be read"}, {"of: folder.yaml\n" + vary, "folder"}, {"of: broken.yaml\n" + vary, "broken.yaml:"}, {"of: ladder.yaml\n" + vary, "is a ladder"},
      {"of: [beaker.yaml]\n" + vary, "a text is needed"}, {of + vary + "step: taken off\n", "did you mean 'taken up'?"}, {of + vary + "steps: x\n", "did you mean 'step'?"},
      {"of: circuit.yaml\nvary: {streams.wash.rate: 1 to 2 m3/h in 2 points}\nstep: x\n", "is of beakers"}, {of + vary + "series: {a: {of: beaker.yaml, vary: {beaker.liquor.NH3: [1 mol/L]}}}\n", "beside 'series'"},
      {"series: {}\n", "no series"}, {"series: [a]\n", "a map of"}, {"series: {a: 3}\n", "a map of"}, {"series: {a: {of: beaker.yaml}}\n", "'vary' is needed"},
      {"series: {a: {of: beaker.yaml, vary: {beaker.liquor.NH3: [1 mol/L]}, step: x}}\n", "not a key here"}};
  for (const auto& [body, piece] : rows) {
    std::string fault;
    ladder(body, &fault);
    EXPECT_NE(fault.find(piece), std::string::npos) << body << " -> " << fault;
    EXPECT_NE(fault.find("study.yaml:"), std::string::npos) << fault;
  }
  Diagnostics diagnostics;
  EXPECT_FALSE(read_ladder("leat: 1\nkind: campaign\n", "x.yaml", diagnostics));
  EXPECT_NE(told(diagnostics).find("Use leat campaign"), std::string::npos) << told(diagnostics);
  EXPECT_EQ(diagnostics.faults().size(), 1u);
}

TEST_F(StudyFiles, aCampaign) {
  const auto a = campaign("of: circuit.yaml\nvary:\n  streams.wash.rate: 2 m3/h to 6 m3/h in 3 points\n  circuit.L.tanks: [2, 3]\nwatch: [recovery.Ag, ph.L.3]\nrank: {by: ph.L.3, best: smallest}\n"
                          "through_time: false\ntime_limit: 60 s\nkeep_results: false\n");
  ASSERT_TRUE(a);
  EXPECT_EQ(a->grid.size(), 2u);
  EXPECT_EQ(a->watch, (Words{"recovery.Ag", "ph.L.3"}));
  EXPECT_EQ(a->rank_by, "ph.L.3");
  EXPECT_FALSE(a->largest_first);
  EXPECT_FALSE(a->through_time);
  EXPECT_FALSE(a->keep_results);
  EXPECT_EQ(a->time_limit, 60);
  const auto b = campaign("of: circuit.yaml\nvary: {circuit.L.tanks: [2, 3]}\nwatch: recovery.Ag\n");
  EXPECT_EQ(b->rank_by, "recovery.Ag");
  EXPECT_TRUE(b->largest_first && b->through_time && b->keep_results);
  EXPECT_EQ(b->time_limit, 600);
}

TEST_F(StudyFiles, aTableOfCases) {
  put("cases.csv", "\xEF\xBB\xBFstreams.wash.rate, \"streams.wash.liquor\"\r\n 2 m3/h ,\"a, \"\"b\"\"\"\r\n\r\n3 m3/h,water");
  const auto a = campaign("of: circuit.yaml\nvary: {circuit.L.tanks: [2, 3]}\ncases: cases.csv\nwatch: [recovery.Ag]\n");
  ASSERT_TRUE(a);
  ASSERT_EQ(a->listed.size(), 2u);
  EXPECT_EQ(a->listed[0], (std::vector<std::pair<std::string, std::string>>{{"streams.wash.rate", "2 m3/h"}, {"streams.wash.liquor", "a, \"b\""}}));
  EXPECT_EQ(a->listed[1][1].second, "water");
  EXPECT_TRUE(campaign("of: circuit.yaml\ncases: cases.csv\nwatch: [recovery.Ag]\n"));
}

TEST_F(StudyFiles, campaignsThatAreRefused) {
  put("twice.csv", "streams.wash.rate,streams.wash.rate\n1 m3/h,2 m3/h\n");
  put("vary.csv", "circuit.L.tanks\n1\n");
  put("unknown.csv", "streams.wash.rate,circuit.L.tank\n1 m3/h,2\n");
  put("short.csv", "streams.wash.rate\n1 m3/h\n1 m3/h,2\n");
  const std::string of = "of: circuit.yaml\n", vary = "vary: {circuit.L.tanks: [2, 3]}\n", watch = "watch: [recovery.Ag]\n";
  const std::vector<std::pair<std::string, std::string>> rows = {
      {of + watch, "'vary' is needed"}, {of + vary, "'watch' is needed"}, {vary + watch, "'of' is needed"}, {of + vary + "watch: []\n", "nothing is watched"},
      {of + vary + "watch: [ph.L.1, ph.L.1]\n", "watched twice"}, {of + vary + "watch: {a: b}\n", "a map stands here"}, {of + vary + watch + "rank: {by: recovery.Au}\n", "did you mean 'recovery.Ag'?"},
      {of + vary + watch + "rank: {best: largest}\n", "'by' is needed"}, {of + vary + watch + "rank: {by: recovery.Ag, best: biggest}\n", "largest, smallest"},
      {of + vary + watch + "time_limit: 0 s\n", "out of range"}, {of + vary + watch + "time_limit: 60\n", "has no unit"}, {of + vary + watch + "time_limit: 5 kg\n", "is not a time"},
      {of + vary + watch + "through_time: no\n", "neither true nor false"}, {of + vary + watch + "keep: true\n", "not a key here"}, {of + vary + watch + "cases: gone.csv\n", "cannot be read"},
      {of + watch + "cases: twice.csv\n", "twice.csv:1:19"}, {of + vary + watch + "cases: vary.csv\n", "varied twice"}, {of + watch + "cases: unknown.csv\n", "unknown.csv:1:19"},
      {of + watch + "cases: short.csv\n", "short.csv:3:1: 2 cells in this row; the header has 1"},
      {of + "vary:\n  circuit.L.tanks: 1 to 9 in 2000 points\n  streams.wash.rate: 1 to 9 m3/h in 501 points\n" + watch, "1002000 cases"}, {of + "vary: {}\n" + watch, "nothing to vary"},
      {"of: beaker.yaml\nvary:\n  steps.2.heat_to: [50 degC]\n  steps.warmed.heat_to: [60 degC]\n" + watch, "varied twice"}};
  for (const auto& [body, piece] : rows) {
    std::string fault;
    campaign(body, &fault);
    EXPECT_NE(fault.find(piece), std::string::npos) << body << " -> " << fault;
  }
}

TEST_F(StudyFiles, aKindIsKnownEverywhere) {
  Diagnostics diagnostics;
  EXPECT_EQ(file_kind("leat: 1\nkind: ladder\n", "x", diagnostics), "ladder");
  EXPECT_EQ(file_kind("leat: 1\nkind: campaign\n", "x", diagnostics), "campaign");
  EXPECT_TRUE(diagnostics.ok());
}

// Tables -------------------------------------------------------------------------------------------------------------

std::string table_fault(const std::string& text) {
  Diagnostics diagnostics;
  EXPECT_FALSE(read_case_table(text, "t.csv", diagnostics));
  return diagnostics.faults().empty() ? "" : to_string(diagnostics.sorted_faults()[0]);
}

TEST(CaseTable, rfc4180) {
  Diagnostics diagnostics;
  const auto table = read_case_table("a,b\r\n\"1\r\n2\",\"\"\"x\"\", y\"\r\n3,4\r\n", "t.csv", diagnostics);
  ASSERT_TRUE(table) << to_string(diagnostics.faults()[0]);
  EXPECT_EQ(table->rows[0][0].text, "1\r\n2");
  EXPECT_EQ(table->rows[0][1].text, "\"x\", y");
  EXPECT_EQ(table->rows[1][0].line, 4);
  EXPECT_EQ(table->rows[1][1].column, 3);
}

TEST(CaseTable, faultsHaveTheirPlace) {
  EXPECT_NE(table_fault("a,b\n1,\n").find("t.csv:2:3"), std::string::npos);
  EXPECT_NE(table_fault("a,b\n1\n").find("t.csv:2:1"), std::string::npos);
  EXPECT_NE(table_fault("a,b\n1,2\"3\n").find("t.csv:2:4"), std::string::npos);
  EXPECT_NE(table_fault("a,b\n1,\"2\n3").find("t.csv:2:3"), std::string::npos);
  EXPECT_NE(table_fault("a,b\n1,\"2\"3\n").find("closing quote"), std::string::npos);
  EXPECT_NE(table_fault("a,b\n1,\xFF\n").find("UTF-8"), std::string::npos);
  EXPECT_NE(table_fault(std::string("a,b\n1,\0\n", 8)).find("NUL"), std::string::npos);
  EXPECT_NE(table_fault("").find("empty"), std::string::npos);
  EXPECT_NE(table_fault("a,b\n").find("no row"), std::string::npos);
  EXPECT_NE(table_fault("a;b\n1;2\n").find("t.csv:1:1: a ';' in the header"), std::string::npos);
}

TEST(CaseTable, randomBytesNeverCrash) {
  std::mt19937 random(5);
  const std::string signs = "a1,\"\n\r \xC2\xB5\xFF;";
  for (int round = 0; round < 20000; ++round) {
    std::string text;
    for (unsigned n = random() % 30; n > 0; --n) text += signs[random() % signs.size()];
    Diagnostics diagnostics;
    const auto table = read_case_table(text, "t.csv", diagnostics);
    EXPECT_EQ(table.has_value(), diagnostics.ok()) << text;
    for (const auto& row : table ? table->rows : std::vector<std::vector<TableCell>>{}) EXPECT_EQ(row.size(), table->header.size());
  }
}

}  // namespace
}  // namespace leat
