// CaseText: values replaced in their place, all else byte for byte; paths; what cannot be varied.
#include "sim/input/case_text.hpp"

#include <gtest/gtest.h>

#include <filesystem>
#include <fstream>
#include <functional>
#include <random>
#include <set>
#include <sstream>

#include "sim/input/scalar_text.hpp"
#include "sim/input/yaml_document.hpp"

namespace leat {
namespace {

using Inputs = std::vector<std::pair<std::string, std::string>>;

CaseText opened(const std::string& text) {
  Diagnostics diagnostics;
  const auto read = CaseText::read(text, "case.yaml", diagnostics);
  EXPECT_TRUE(read) << (diagnostics.ok() ? "" : to_string(diagnostics.faults().front())) << "\n" << text;
  return read.value_or(CaseText());
}

std::string replaced(const std::string& text, const Inputs& inputs) { return opened(text).with(inputs); }

std::string fault_of(const std::string& text, const std::string& path) {
  Diagnostics diagnostics;
  EXPECT_FALSE(opened(text).has(path, {"study.yaml", 7, 3, "vary"}, diagnostics)) << path;
  if (diagnostics.faults().size() != 1) return "not one fault";
  EXPECT_EQ(diagnostics.faults()[0].place.file, "study.yaml");
  EXPECT_EQ(diagnostics.faults()[0].place.line, 7);
  return diagnostics.faults()[0].text;
}

// One file with every awkward form of YAML that is read.
const std::string awkward =
    "\xEF\xBB\xBF# a comment: with a colon\n"
    "leat:   1   # behind\n"
    "title: \"in quotes, \\\"with\\\" escapes \\u00b5\"   # \xC2\xB5\n"
    "\xC3\xA4\xC3\xB6: {(NH4)2SO4: 0.5 mol/L, Ag(NH3)2^+: 'it''s', \"quoted key\": \"x\", CuSO4.5H2O: 1 g/L}\n"
    "list: [a, \"b\", 'c d', 4 m3]\n"
    "steps:\n"
    "- {name: taken up}\n"
    "- name: warmed.twice\n"
    "  heat_to: 60 degC\n"
    "-   {add: {NaCl: 3 g}, name: \"7\"}\n"
    "deep: {a: {b: [{c: 1}, {c: 2, d: [x, y]}]}}\n"
    "json: {\"k\":\"v\",\"n\":12}\n"
    "plain: 25 degC over\n"
    "folded: one\n"
    "  two\n"
    "block: |\n"
    "  text\n"
    "wide: \"one\n"
    "  two\"\n"
    "last: 9";

// Every path of a document to a single value.
void paths_below(const YamlNode& node, const std::string& path, std::vector<std::string>& out) {
  if (node.is_scalar()) out.push_back(path);
  for (const auto& entry : node.entries) paths_below(entry.value, path.empty() ? entry.key : path + "." + entry.key, out);
  for (std::size_t i = 0; i < node.items.size(); ++i) paths_below(node.items[i], path + "." + std::to_string(i + 1), out);
}

std::vector<std::string> paths_of(const std::string& text) {
  Diagnostics diagnostics;
  std::vector<std::string> paths;
  if (const auto root = read_yaml(text, "case.yaml", diagnostics)) paths_below(*root, "", paths);
  return paths;
}

TEST(CaseText, replacesInPlaceAndLeavesTheRest) {
  EXPECT_EQ(replaced("a: 1   # one\nb: {c: 4 mol/L, d: 2}\n", {{"b.c", "5 mol/L"}}), "a: 1   # one\nb: {c: 5 mol/L, d: 2}\n");
  EXPECT_EQ(replaced("a: 1\r\nb: 2\r\n", {{"b", "30"}, {"a", "10"}}), "a: 10\r\nb: 30\r\n");
  EXPECT_EQ(replaced("a: \"4 m3\"  # t\n", {{"a", "5 m3"}}), "a: 5 m3  # t\n");
  EXPECT_EQ(replaced("a: 'it''s'\nb: 1", {{"a", "x"}}), "a: x\nb: 1");
  EXPECT_EQ(replaced("\xC3\xA4: {\xC3\xB6: 1, u: 2}\n", {{"\xC3\xA4.u", "3"}}), "\xC3\xA4: {\xC3\xB6: 1, u: 3}\n");
  EXPECT_EQ(replaced("\xEF\xBB\xBF" "a: 1\n", {{"a", "2"}}), "\xEF\xBB\xBF" "a: 2\n");
  EXPECT_EQ(replaced("a: 1\n", {}), "a: 1\n");
}

TEST(CaseText, quotesWhereYamlNeedsIt) {
  for (const std::string value : {"a: b", "#x", "a #b", "- x", "[1, 2]", "{a: 1}", "it's", "\"", "", " x", "x ", "null", "~", "<<", "*a", "&a", "!t", "%a", "@a", "`a",
                                  "a,b", "two\nlines", "tab\there", "a\\b", "?", "...", "---", ":", "a:", "'", "true", "-", "-1e-5", "1/h", "Cu = Cu^2+ + 2 e^-", "\xC2\xB5m"})
    for (const std::string text : {"a: 1\nb: 2\n", "x: {a: 1, b: 2}\n", "x: [1, 2]\n", "x: {\"a\":\"1\",\"b\":\"2\"}\n"}) {
      const std::string path = paths_of(text)[0];
      const CaseText variant = opened(replaced(text, {{path, value}}));
      EXPECT_EQ(variant.value(path), value) << variant.text();
      EXPECT_EQ(variant.value(paths_of(text)[1]), "2");
    }
  EXPECT_EQ(written_scalar("4 mol/L"), "4 mol/L");
  EXPECT_EQ(written_scalar("-1.5"), "-1.5");
  EXPECT_EQ(written_scalar("600 mg/L as NaCN"), "600 mg/L as NaCN");
  EXPECT_EQ(written_scalar("8 %"), "8 %");
}

TEST(CaseText, keysWithPointsBlanksAndBrackets) {
  const CaseText text = opened(awkward);
  for (const auto& [path, value] : Inputs{{"\xC3\xA4\xC3\xB6.(NH4)2SO4", "0.5 mol/L"}, {"\xC3\xA4\xC3\xB6.Ag(NH3)2^+", "it's"}, {"\xC3\xA4\xC3\xB6.CuSO4.5H2O", "1 g/L"},
                                          {"\xC3\xA4\xC3\xB6.quoted key", "x"}, {"steps.warmed.twice.heat_to", "60 degC"}, {"steps.2.heat_to", "60 degC"},
                                          {"steps.7.add.NaCl", "3 g"}, {"steps.3.add.NaCl", "3 g"}, {"list.4", "4 m3"}, {"deep.a.b.2.d.1", "x"}, {"steps.taken up.name", "taken up"}})
    EXPECT_EQ(text.value(path), value) << path;
  EXPECT_TRUE(text.same("steps.2.heat_to", "steps.warmed.twice.heat_to"));
  EXPECT_FALSE(text.same("list.1", "list.2"));
}

TEST(CaseText, theLongestKeyWins) {
  const CaseText text = opened("a: {b: 1, b.c: 2, b.cd: 3}\na.b: 4\n");
  EXPECT_EQ(text.value("a.b"), "4");
  EXPECT_EQ(opened("a: {b: 1, b.c: 2, b.cd: 3}\n").value("a.b.c"), "2");
  EXPECT_EQ(opened("a: {b: 1, b.c: 2, b.cd: 3}\n").value("a.b.cd"), "3");
  EXPECT_EQ(opened("a: {b: 1, b.c: 2, b.cd: 3}\n").value("a.b"), "1");
}

TEST(CaseText, whatIsNotThereIsNamedWithTheNearest) {
  const std::string text = "streams:\n  wash: {rate: 4 m3/h, CuSO4.5H2O: 1 g/L}\nsteps: [{name: warmed}]\nnote: |\n  long\n";
  EXPECT_NE(fault_of(text, "streams.wahs.rate").find("did you mean 'wash'?"), std::string::npos);
  EXPECT_NE(fault_of(text, "streams.wash.raet").find("did you mean 'rate'?"), std::string::npos);
  EXPECT_NE(fault_of(text, "streams.wash.CuSO4.5H20").find("did you mean 'CuSO4.5H2O'?"), std::string::npos);
  EXPECT_NE(fault_of(text, "streams.wash.rates").find("give it a value there first"), std::string::npos);
  EXPECT_NE(fault_of(text, "streams.wash").find("is a map, not a single value; name one value in it, such as streams.wash.rate"), std::string::npos);
  EXPECT_NE(fault_of(text, "steps").find("is a list"), std::string::npos);
  EXPECT_NE(fault_of(text, "steps.2.name").find("It has: warmed"), std::string::npos);
  EXPECT_NE(fault_of(text, "streams.wash.rate.x").find("which is a single value"), std::string::npos);
  EXPECT_NE(fault_of(text, "note").find("spans lines"), std::string::npos);
  for (const std::string path : {"", ".", "streams.", ".streams", "streams..wash", "streams.wash.rate.", "steps.0.name", "steps.-1", "steps.99999999999999999999", " streams"})
    EXPECT_NE(fault_of(text, path), "not one fault") << path;
}

TEST(CaseText, whatSpansLinesCannotBeVaried) {
  for (const std::string path : {"folded", "block", "wide"}) EXPECT_NE(fault_of(awkward, path).find("spans lines"), std::string::npos) << path;
}

TEST(CaseText, aPathNobodyCheckedIsAFaultOfTheProgram) {
  const CaseText text = opened("a: 1\nb: {c: 2}\n");
  EXPECT_THROW(text.value("x"), std::logic_error);
  EXPECT_THROW(text.value("b"), std::logic_error);
  EXPECT_THROW(text.with(Inputs{{"a", "1"}, {"a", "2"}}), std::logic_error);
  EXPECT_THROW(text.with(Inputs{{"a", std::string("\0", 1)}}), std::logic_error);
  EXPECT_THROW(text.with(Inputs{{"a", "\xFF"}}), std::logic_error);
}

std::vector<std::pair<std::string, std::string>> documents() {
  std::vector<std::pair<std::string, std::string>> found = {{"awkward", awkward}};
  for (const auto& file : std::filesystem::directory_iterator(LEAT_FLOWSHEETS)) {
    if (file.path().extension() != ".yaml") continue;
    std::ifstream in(file.path(), std::ios::binary);
    std::stringstream all;
    all << in.rdbuf();
    found.emplace_back(file.path().filename().string(), all.str());
  }
  EXPECT_GE(found.size(), 5u);
  return found;
}

std::string random_value(std::mt19937& random) {
  static const std::vector<std::string> pieces = {"1", "4.5 mol/L", " ", ":", "#", "'", "\"", "\\", ",", "[", "]", "{", "}", "-", "?", "|", ">", "%", "@", "&", "*", "!", "~", "null",
                                                  "true", "\n", "\t", "\xC2\xB5", "\xE2\x82\xAC", "\xF0\x9F\x9A\xB0", "a", "Ag(NH3)2^+", "=", "<<", "---", "...", "\r"};
  std::string value;
  for (unsigned n = random() % 6; n > 0; --n) value += pieces[random() % pieces.size()];
  return value;
}

TEST(CaseText, randomReplacementsReadBackAndLeaveTheRest) {
  std::mt19937 random(20240611);
  for (const auto& [name, text] : documents()) {
    const CaseText file = opened(text);
    std::vector<std::string> paths;
    Diagnostics unused;
    for (const std::string& path : paths_of(text))
      if (file.has(path, {}, unused)) paths.push_back(path);
    ASSERT_GT(paths.size(), 3u) << name;
    for (int round = 0; round < 120; ++round) {
      std::set<std::string> taken;
      Inputs inputs;
      for (unsigned n = 1 + random() % 4; n > 0; --n) {
        const std::string path = paths[random() % paths.size()];
        if (path.ends_with(".name") || !taken.insert(path).second) continue;
        inputs.emplace_back(path, random_value(random));
      }
      const std::string variant_text = file.with(inputs);
      const CaseText variant = opened(variant_text);
      Inputs back;
      for (const auto& [path, value] : inputs) {
        EXPECT_EQ(variant.value(path), value) << name << " " << path;
        back.emplace_back(path, file.value(path));
      }
      for (const std::string& path : paths) {
        if (!taken.count(path)) {
          EXPECT_EQ(variant.value(path), file.value(path)) << name << " " << path;
        }
      }
      EXPECT_EQ(std::count(variant_text.begin(), variant_text.end(), '\n'), std::count(text.begin(), text.end(), '\n'));
      const CaseText returned = opened(variant.with(back));  // quotes may have changed, nothing else
      for (const std::string& path : paths) EXPECT_EQ(returned.value(path), file.value(path)) << name << " " << path;
    }
  }
}

TEST(CaseText, randomPathsNeverCrash) {
  std::mt19937 random(7);
  const CaseText file = opened(awkward);
  const std::string letters = "abcdesty.(){}[]123 \xC3\xA4\xFF\x80:'\"";
  const std::vector<std::string> paths = paths_of(awkward);
  for (int round = 0; round < 20000; ++round) {
    std::string path = random() % 2 ? paths[random() % paths.size()] : "";
    for (unsigned n = random() % 6; n > 0; --n) {
      const std::size_t at = random() % (path.size() + 1);
      if (random() % 2 && at < path.size()) path.erase(at, 1);
      else path.insert(at, 1, letters[random() % letters.size()]);
    }
    Diagnostics diagnostics;
    const bool there = file.has(path, {"s", 1, 1, ""}, diagnostics);
    EXPECT_EQ(diagnostics.faults().size(), there ? 0u : 1u) << path;
    if (there) {
      EXPECT_NO_THROW(file.with(Inputs{{path, "v"}})) << path;
    }
  }
}

}  // namespace
}  // namespace leat
