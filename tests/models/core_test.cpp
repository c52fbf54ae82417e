// models/core: places and diagnostics, nearest words, quantities and every trap of units.
#include <gtest/gtest.h>
#include <udunits2.h>

#include <cmath>
#include <set>
#include <stdexcept>
#include <thread>

#include "models/core/check.hpp"
#include "models/core/constants.hpp"
#include "models/core/diagnostics.hpp"
#include "models/core/nearest.hpp"
#include "models/core/place.hpp"
#include "models/core/quantity.hpp"

namespace leat {
namespace {

// A typed quantity in another unit [to]; NaN with a test failure when it is refused.
double value_of(std::string_view text, std::string_view to) {
  const QuantityReading reading = parse_quantity(text);
  EXPECT_TRUE(reading.ok) << text << ": " << reading.fault;
  return reading.ok ? convert(reading.quantity, to) : std::nan("");
}

std::string fault_of(std::string_view text) {
  const QuantityReading reading = parse_quantity(text);
  EXPECT_FALSE(reading.ok) << text;
  return reading.fault;
}

TEST(place, names_file_line_column_and_key) {
  EXPECT_EQ(to_string(Place{"tank.yaml", 14, 21, "circuit.L1.volume"}), "tank.yaml:14:21 circuit.L1.volume");
  EXPECT_EQ(to_string(Place{"tank.yaml", 0, 0, ""}), "tank.yaml");
  EXPECT_EQ(to_string(Place{"tank.yaml", 1, 1, ""}), "tank.yaml:1:1");
}

TEST(diagnostics, every_code_has_a_name_and_a_sentence) {
  std::set<std::string_view> names;
  for (const CodeEntry& entry : code_table()) {
    EXPECT_EQ(code_name(entry.code), entry.name);
    EXPECT_TRUE(names.insert(entry.name).second) << entry.name;
    EXPECT_TRUE(entry.meaning.ends_with('.')) << entry.name;
  }
  EXPECT_EQ(code_name(Code::bad_yaml), "bad_yaml");
  EXPECT_EQ(code_name(Code::bad_data), "bad_data");
  EXPECT_EQ(names.size(), 17u);
}

TEST(diagnostics, are_collected_and_sorted_by_place) {
  Diagnostics diagnostics;
  EXPECT_TRUE(diagnostics.ok());
  diagnostics.caution(Code::out_of_range, {"a.yaml", 9, 1, "x"}, "far from the data");
  EXPECT_TRUE(diagnostics.ok());
  diagnostics.fault(Code::wrong_unit, {"a.yaml", 14, 21, "circuit.L1.residence_time"}, "6 kg is not a time; write for example 6 h");
  diagnostics.fault(Code::unknown_key, {"a.yaml", 2, 10, "z"}, "second");
  diagnostics.fault(Code::unknown_key, {"a.yaml", 2, 3, "y"}, "first");
  EXPECT_FALSE(diagnostics.ok());
  EXPECT_EQ(to_string(diagnostics.faults()[0]), "a.yaml:14:21 circuit.L1.residence_time: 6 kg is not a time; write for example 6 h");
  const std::vector<Diagnostic> sorted = diagnostics.sorted_faults();
  ASSERT_EQ(sorted.size(), 3u);
  EXPECT_EQ(sorted[0].text, "first");
  EXPECT_EQ(sorted[1].text, "second");
  EXPECT_EQ(sorted[2].place.line, 14);
  EXPECT_EQ(diagnostics.cautions().size(), 1u);
}

TEST(nearest, finds_a_mistyped_word) {
  const std::vector<std::string> words = {"volume", "residence_time", "temperature", "Cu", "CU"};
  EXPECT_EQ(nearest("volum", words), "volume");
  EXPECT_EQ(nearest("VOLUME", words), "volume");
  EXPECT_EQ(nearest("vloume", words), "volume");
  EXPECT_EQ(nearest("residense_tiem", words), "residence_time");
  EXPECT_EQ(nearest("cu", words), "Cu");  // both are equal but for case; Cu is one edit away, CU two
  EXPECT_EQ(nearest("cU", words), "CU");
  EXPECT_EQ(nearest("pressure", words), "");
  EXPECT_EQ(nearest("x", words), "");  // one letter is near to nothing
  EXPECT_EQ(nearest("", words), "");
  EXPECT_EQ(edit_distance("abcd", "acbd"), 1);
  EXPECT_EQ(edit_distance("", "abc"), 3);
  EXPECT_EQ(did_you_mean("volum", words), "; did you mean 'volume'?");
  EXPECT_EQ(did_you_mean("pressure", words), "");
}

TEST(check, throws_with_place_and_message) {
  EXPECT_NO_THROW(check(true, "fine"));
  try {
    check(false, "the sum is one");
    FAIL();
  } catch (const std::logic_error& error) {
    EXPECT_NE(std::string(error.what()).find("core_test.cpp"), std::string::npos);
    EXPECT_NE(std::string(error.what()).find("the sum is one"), std::string::npos);
  }
}

TEST(number, has_one_form) {
  for (const char* text : {"0", "-0.5", "12", "1.5e-3", "1E6", "1e+6", "0.08"}) EXPECT_TRUE(parse_number(text)) << text;
  for (const char* text : {"", " 1", "1 ", "+1", "010", "-01", "00", ".5", "5.", "1e", "1e+", "0x10", "nan", "inf", "-inf", "NaN", ".nan", ".inf",
                           "1,5", "1_000", "1e999", "-1e999", "1e-999", "--1", "1.2.3", "1f", "\xE2\x88\x92" "1"}) {
    EXPECT_FALSE(parse_number(text)) << text;
  }
  EXPECT_DOUBLE_EQ(*parse_number("1.5e-3"), 0.0015);
}

TEST(quantity, reads_what_a_plant_writes) {
  struct Row {
    const char* text;
    const char* to;
    double value;  // [to]
  };
  const Row rows[] = {
      {"4 mol/L", "mol/m3", 4000}, {"25 degC", "K", 298.15}, {"-10 degC", "K", 263.15}, {"8 %", "1", 0.08}, {"0.91 kg/L", "kg/m3", 910},
      {"1.5e-3 m3/h", "m3/s", 1.5e-3 / 3600}, {"-20 kJ/mol", "J/mol", -20000}, {"6 h", "s", 21600}, {"90 min", "s", 5400}, {"2 d", "s", 172800},
      {"1 a", "d", 365.25}, {"120 m3", "m3", 120}, {"5 t", "kg", 5000}, {"1 kt", "kg", 1e6}, {"2 Mt/a", "t/d", 2e6 / 365.25}, {"75 um", "m", 75e-6},
      {"75 \u00b5m", "m", 75e-6}, {"75 \u03bcm", "m", 75e-6}, {"2 g/t", "1", 2e-6}, {"2 kg/t", "kg/kg", 2e-3}, {"150 ppm", "1", 150e-6},
      {"0.5 M", "mol/m3", 500}, {"3 mM", "mol/m3", 3}, {"30 g/L", "kg/m3", 30}, {"2 bar", "Pa", 2e5}, {"1 atm", "Pa", 101325}, {"450 kPa", "Pa", 4.5e5},
      {"15 kWh/t", "J/kg", 54000}, {"1.2 cP", "Pa.s", 1.2e-3}, {"1 cal", "J", 4.184}, {"0.45 V", "V", 0.45}, {"450 mV", "V", 0.45},
      {"30 kW", "J/s", 30000}, {"20 1/h", "1/s", 20.0 / 3600}, {"20 h-1", "1/s", 20.0 / 3600}, {"75 J/(mol K)", "J/mol/K", 75}, {"75 J/mol/K", "J/mol/K", 75},
      {"3 m^3", "m3", 3}, {"3 m\u00b3/h", "m3/h", 3}, {"25 \u00b0C", "K", 298.15}, {"0.5 mol/kg", "mol/kg", 0.5}, {"2 mol m-3", "mol/m3", 2},
      {"8%", "1", 0.08}, {"  4   mol/L ", "mol/L", 4}, {"4 mol / L", "mol/L", 4}, {"1.2 kg*m/s2", "N", 1.2}, {"5 mL", "L", 0.005}, {"5 g/l", "g/L", 5},
  };
  for (const Row& row : rows) {
    EXPECT_NEAR(value_of(row.text, row.to), row.value, 1e-12 * std::abs(row.value)) << row.text;
    EXPECT_NEAR(convert({row.value, row.to}, parse_quantity(row.text).quantity.unit), parse_quantity(row.text).quantity.number,
                1e-11 * std::abs(row.value) + 1e-12) << row.text << " and back";
  }
}

TEST(quantity, normal_cubic_metre_is_an_amount) {
  EXPECT_NEAR(value_of("1 Nm3", "mol"), 44.615, 5e-4);
  EXPECT_DOUBLE_EQ(value_of("1 Nm3", "mol"), standard_atmosphere / (gas_constant * zero_celsius));
  EXPECT_NEAR(value_of("50 Nm3/h", "mol/s"), 50 * 44.615 / 3600, 1e-4);
  EXPECT_FALSE(convertible("Nm3", "m3"));
  EXPECT_NEAR(value_of("3 Nm3/t", "mol/kg"), 3 * 44.615 / 1000, 1e-5);
}

TEST(quantity, a_bare_number_has_no_unit) {
  const QuantityReading reading = parse_quantity("5");
  EXPECT_TRUE(reading.ok);
  EXPECT_EQ(reading.quantity.unit, "");
  EXPECT_DOUBLE_EQ(reading.quantity.number, 5);
  EXPECT_FALSE(convertible("", "1"));
  EXPECT_FALSE(known_unit(""));
  EXPECT_FALSE(known_unit("  "));
  EXPECT_THROW(convert({5, ""}, "1"), std::invalid_argument);
}

TEST(quantity, refuses_numbers_in_other_forms) {
  EXPECT_EQ(fault_of("010 h"), "'010 h' has a leading zero; leave it out");
  EXPECT_EQ(fault_of("+5 h"), "'+5 h' starts with a plus; leave it out");
  EXPECT_EQ(fault_of("nan"), "'nan' does not start with a number");
  EXPECT_EQ(fault_of("inf h"), "'inf h' does not start with a number");
  EXPECT_EQ(fault_of(".inf"), "'.inf' does not start with a number");
  EXPECT_EQ(fault_of("0x10 h"), "'0x10 h' is not a decimal number");
  EXPECT_EQ(fault_of("1,5 h"), "'1,5 h' has a comma; the decimal sign is a point");
  EXPECT_EQ(fault_of("1 000 m3"), "'1 000 m3' has a second number; a number is written without blanks");
  EXPECT_EQ(fault_of(".5 h"), "'.5 h' has no digit before the point");
  EXPECT_EQ(fault_of("5. h"), "'5. h' has no digit behind the point");
  EXPECT_EQ(fault_of("1e999 h"), "'1e999 h' is too large or too small for a number");
  EXPECT_EQ(fault_of(""), "is empty where a number is expected");
  EXPECT_EQ(fault_of("h"), "'h' does not start with a number");
}

TEST(quantity, refuses_words_with_two_meanings) {
  EXPECT_EQ(fault_of("5 ton"), "'ton' could be 1000 kg or 907 kg or 1016 kg; write t for 1000 kg");
  EXPECT_EQ(fault_of("5 ton/h"), "'ton' could be 1000 kg or 907 kg or 1016 kg; write t for 1000 kg");
  EXPECT_EQ(fault_of("25 C"), "'C' could be degrees Celsius or a charge; write degC, or A.s for a charge");
  EXPECT_EQ(fault_of("77 F"), "'F' could be degrees Fahrenheit or a capacitance; write degC or K");
  EXPECT_EQ(fault_of("3 gal"), "'gal' could be an American or an imperial gallon, or an acceleration; write L");
  EXPECT_EQ(fault_of("3 oz"), "'oz' could be a mass, a troy mass or a volume; write g");
  EXPECT_EQ(fault_of("3 hours"), "'hours' is written h");
  EXPECT_EQ(fault_of("3 Hz"), "'Hz' is written 1/s");
  EXPECT_EQ(fault_of("3 Nm"), "'Nm' could be a torque or a normal cubic metre; write N.m, or Nm3");
  EXPECT_EQ(fault_of("3 wt%"), "'wt%' is not read; a mass ratio is written 8 % or 0.08 kg/kg");
}

TEST(quantity, refuses_what_the_library_would_let_through) {
  // A shift of origin, words of its own grammar, numbers inside, brackets, a unit of nothing.
  for (const char* text : {"5 K @ 273.15", "5 s since 2000", "5 s from 2000", "5 s after 2000", "5 s ref 2", "5 kg per L", "5 25 g/L", "5 kg)", "5 (kg",
                           "5 g/100mL", "5 log(re mW)", "5 kg-m", "5 m0", "5 m33", "5 kg/", "5 /kg", "5 kg//L", "5 kg..m", "5 1", "5 m**3", "5 m 3"}) {
    EXPECT_FALSE(parse_quantity(text).ok) << text;
  }
  // Prefixes only where someone writes them: these would be a centiday, a hectoyear, a picohenry, a centitonne, an are.
  for (const char* unit : {"cd", "ha", "pH", "ct", "mt", "ma", "kh", "kkg", "mkg", "kdegC", "k%"}) EXPECT_FALSE(known_unit(unit)) << unit;
  EXPECT_EQ(fault_of("5 kg)"), "'kg)' is not a unit");
  EXPECT_EQ(fault_of("5 (kg"), "'(kg' has a bracket that is not closed");
  EXPECT_EQ(fault_of("5 J/mol K"), "'J/mol K' can be read in two ways; write each divisor with its own '/', as in J/mol/K");
  EXPECT_EQ(fault_of("5 J/degC"), "'J/degC' puts degC into a product; write K");
  EXPECT_EQ(fault_of("5 molar"), "'molar' is not a unit known here; did you mean 'mol'?");
}

TEST(quantity, a_unit_and_its_reciprocal_are_different) {
  EXPECT_FALSE(convertible("s", "1/s"));
  EXPECT_FALSE(convertible("L/mol", "mol/L"));
  EXPECT_THROW(convert({6, "s"}, "1/s"), std::invalid_argument);
}

TEST(quantity, convertible_judges_dimension) {
  EXPECT_TRUE(convertible("g/L", "kg/m3"));
  EXPECT_FALSE(convertible("g/L", "mol/m3"));
  EXPECT_FALSE(convertible("kg", "s"));
  EXPECT_FALSE(convertible("xyz", "s"));
  EXPECT_FALSE(convertible("s", "xyz"));
  EXPECT_THROW(convert({1, "kg"}, "s"), std::invalid_argument);
  EXPECT_THROW(convert({1, "xyz"}, "xyz"), std::invalid_argument);
  EXPECT_THROW(convert({1e308, "Mt"}, "ng"), std::invalid_argument);
}

TEST(quantity, a_temperature_difference_is_no_temperature) {
  EXPECT_DOUBLE_EQ(convert_difference({5, "degC"}, "K"), 5);
  EXPECT_DOUBLE_EQ(convert_difference({5, "\u00b0C"}, "K"), 5);
  EXPECT_DOUBLE_EQ(convert_difference({5, "K"}, "degC"), 5);
  EXPECT_DOUBLE_EQ(convert({5, "degC"}, "K"), 278.15);
  EXPECT_DOUBLE_EQ(convert({278.15, "K"}, "degC"), 5);
}

TEST(quantity, hint_names_the_dimension_and_an_example) {
  EXPECT_EQ(unit_hint("kg", "s"), "is not a time; write for example 6 h");
  EXPECT_EQ(unit_hint("", "s"), "has no unit; a time is needed, write for example 6 h");
  EXPECT_EQ(unit_hint("g/L", "mol/m3"), "is not a concentration; write for example 4 mol/L");
  EXPECT_EQ(unit_hint("kg", "K"), "is not a temperature; write for example 25 degC");
  EXPECT_EQ(unit_hint("kg", "m3/s"), "is not a volume flow; write for example 12 m3/h");
  EXPECT_EQ(unit_hint("kg", "mol/kg"), "is not a molality; write for example 0.5 mol/kg");
  EXPECT_EQ(unit_hint("s", "1/s"), "is not a rate per time; write for example 20 1/h");
  EXPECT_EQ(unit_hint("s", "kg4"), "cannot be converted to kg4");
  // Each example is itself of the dimension it stands for.
  for (const char* to : {"s", "m3", "kg", "mol", "m", "K", "J/mol", "mol/m3", "kg/m3", "m3/s", "kg/s", "mol/s", "1/s", "Pa", "1", "V", "mol/kg", "m2", "m/s", "J",
                         "W", "Pa.s", "mol/m2/s", "mol/m3/s", "kg/m2/s", "m3/mol", "kg/mol", "m2/s", "m2/kg", "m3/kg", "J/kg", "W/m3", "A", "J/kg/K", "W/K",
                         "W/m2/K", "J/mol/K"}) {
    const std::string hint = unit_hint("kg9", to);
    const std::string mark = "write for example ";
    ASSERT_NE(hint.find(mark), std::string::npos) << to;
    const QuantityReading example = parse_quantity(hint.substr(hint.find(mark) + mark.size()));
    EXPECT_TRUE(example.ok && convertible(example.quantity.unit, to)) << hint;
  }
}

TEST(quantity, units_written_to_results_mean_the_same_to_the_stock_database) {
  ut_set_error_message_handler(ut_ignore);
  ut_system* const stock = ut_read_xml(nullptr);
  ASSERT_NE(stock, nullptr);
  const std::pair<const char*, const char*> rows[] = {{"mol m-3", "mol/m3"}, {"kg s-1", "kg/s"}, {"1", "1"}, {"K", "K"}, {"h", "h"}, {"kg m-3", "g/L"},
                                                      {"m3 s-1", "m3/s"}, {"Pa", "Pa"}, {"V", "V"}, {"s-1", "1/s"}, {"mol kg-1", "mol/kg"}, {"kg", "kg"}};
  for (const auto& [written, ours] : rows) {
    EXPECT_NEAR(convert({1, written}, ours), 1, 1e-14) << written;
    ut_unit* const theirs = ut_parse(stock, written, UT_ASCII);
    EXPECT_NE(theirs, nullptr) << written;
    ut_free(theirs);
  }
  ut_free_system(stock);
}

TEST(quantity, two_threads_do_not_end_the_process) {
  const auto work = [] {
    for (int i = 0; i < 2000; ++i) convert({1.0, "kg"}, "g" + std::string(static_cast<std::size_t>(i % 5), ' '));
  };
  std::thread one(work);
  std::thread two(work);
  one.join();
  two.join();
}

TEST(constants, agree_with_each_other) {
  EXPECT_NEAR(gas_constant, avogadro * 1.380649e-23, 1e-14);   // R = N_A k
  EXPECT_NEAR(faraday, avogadro * 1.602176634e-19, 1e-5);       // F = N_A e
}

}  // namespace
}  // namespace leat
