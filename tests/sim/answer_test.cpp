// Answers as JSON (RFC 8259): read back by a parser they say the same, whatever stands in them.
#include "sim/results/answer.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <nlohmann/json.hpp>

namespace leat {
namespace {

using nlohmann::json;

Answer full() {
  Answer answer;
  answer.verb = "run";
  answer.file = "case.yaml";
  answer.title = "Tanks \"one\" \u00b5\n\x01";
  answer.lines = {"first", "second"};
  answer.tables = {{"streams", "Streams", {{"stream", ""}, {"pulp", "m3/h"}}, {{"feed", 0.1 + 0.2}, {"none", std::nan("")}}, "a note"},
                   {"history", "Through time", {{"time", "h"}}, {}, ""}};
  answer.cautions = {"take care"};
  answer.written = {{"results", "outputs/case.h5"}};
  return answer;
}

TEST(Answer, ReadsBack) {
  const json read = json::parse(to_json(full(), "leat test"));
  EXPECT_EQ(read["program"], "leat test");
  EXPECT_EQ(read["verb"], "run");
  EXPECT_EQ(read["title"], full().title);
  EXPECT_EQ(read["lines"], json({"first", "second"}));
  EXPECT_EQ(read["cautions"], json::array({"take care"}));
  EXPECT_EQ(read["written"]["results"], "outputs/case.h5");
  const json& streams = read["tables"]["streams"];
  EXPECT_EQ(streams["heading"], "Streams");
  EXPECT_EQ(streams["note"], "a note");
  EXPECT_EQ(streams["columns"][1], json({{"name", "pulp"}, {"unit", "m3/h"}}));
  EXPECT_EQ(streams["rows"][0][1].get<double>(), 0.1 + 0.2);
  EXPECT_TRUE(streams["rows"][1][1].is_null());
  EXPECT_TRUE(read["tables"]["history"]["rows"].empty());
}

TEST(Answer, NumbersAreWhole) {
  Answer answer = full();
  const std::vector<double> hard = {5e-324, 1.7976931348623157e308, -0.1, 1.0 / 3.0, 1e22, 123456789012345680.0, 0.0};
  answer.tables = {{"numbers", "", {{"value", ""}}, {}, ""}};
  for (const double value : hard) answer.tables[0].rows.push_back({value});
  answer.tables[0].rows.push_back({std::numeric_limits<double>::infinity()});
  answer.tables[0].rows.push_back({-std::numeric_limits<double>::infinity()});
  const json rows = json::parse(to_json(answer, ""))["tables"]["numbers"]["rows"];
  for (std::size_t k = 0; k < hard.size(); ++k) EXPECT_EQ(rows[k][0].get<double>(), hard[k]);
  EXPECT_TRUE(rows[hard.size()][0].is_null());
  EXPECT_TRUE(rows[hard.size() + 1][0].is_null());
}

TEST(Answer, StatusSaysTheExitCode) {
  const std::vector<std::string> words = {"done", "usage", "input_faults", "not_solved", "machine_trouble", "own_bug"};
  for (std::size_t code = 0; code < words.size(); ++code) {
    Answer answer;
    answer.exit_code = static_cast<int>(code);
    const json read = json::parse(to_json(answer, ""));
    EXPECT_EQ(read["status"], words[code]);
    EXPECT_EQ(read["exit_code"], code);
  }
}

TEST(Answer, FaultsKeepTheirPlaces) {
  Answer answer = full();
  answer.faults = {{Code::wrong_unit, {"case.yaml", 14, 21, "circuit.L1.residence_time"}, "6 kg is not a time"}};
  answer.remarks = {{Code::bad_data, {"case.yaml", 0, 0, ""}, "as a whole"}};
  const json read = json::parse(to_json(answer, ""));
  EXPECT_EQ(read["faults"], json::array({{{"file", "case.yaml"}, {"line", 14}, {"column", 21}, {"key", "circuit.L1.residence_time"},
                                          {"code", "wrong_unit"}, {"message", "6 kg is not a time"}}}));
  EXPECT_EQ(read["remarks"][0]["message"], "as a whole");
}

TEST(Answer, BadBytesAreReplaced) {
  Answer answer = full();
  answer.file = "caf\xE9.yaml";
  answer.failure = "\xFF";
  const json read = json::parse(to_json(answer, ""));
  EXPECT_EQ(read["file"], "caf\uFFFD.yaml");
  EXPECT_EQ(read["failure"], "\uFFFD");
}

}  // namespace
}  // namespace leat
