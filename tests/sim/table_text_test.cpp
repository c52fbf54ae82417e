// Tables for the terminal and as CSV, and the number format they share.
#include "sim/results/table_text.hpp"

#include <gtest/gtest.h>

#include <charconv>
#include <cmath>
#include <limits>
#include <random>
#include <stdexcept>

#include "sim/results/utf8.hpp"

namespace leat {
namespace {

const double nan = std::numeric_limits<double>::quiet_NaN();
const double infinity = std::numeric_limits<double>::infinity();

TEST(Significant, KeepsSoManyDigits) {
  EXPECT_EQ(significant(0.83124), "0.8312");
  EXPECT_EQ(significant(22), "22.00");
  EXPECT_EQ(significant(-3.14159), "-3.142");
  EXPECT_EQ(significant(1234.6), "1235");
  EXPECT_EQ(significant(1234567), "1235000");
  EXPECT_EQ(significant(0.5, 1), "0.5");
  EXPECT_EQ(significant(7, 1), "7");
  EXPECT_EQ(significant(1.0 / 3, 17), "0.33333333333333331");
}

TEST(Significant, RoundsBeforePlacingThePoint) {
  EXPECT_EQ(significant(9.9996), "10.00");
  EXPECT_EQ(significant(0.99996), "1.000");
  EXPECT_EQ(significant(9999.6), "10000");
}

TEST(Significant, WritesAnExponentOnlyForVerySmallAndVeryLarge) {
  EXPECT_EQ(significant(1e-4), "0.0001000");
  EXPECT_EQ(significant(9.99e-5), "9.990e-05");
  EXPECT_EQ(significant(9.99999e-5), "0.0001000");
  EXPECT_EQ(significant(9999000), "9999000");
  EXPECT_EQ(significant(9999999), "1.000e+07");
  EXPECT_EQ(significant(-4.2e12), "-4.200e+12");
  EXPECT_EQ(significant(5e-324), "4.941e-324");
}

TEST(Significant, SpecialValues) {
  EXPECT_EQ(significant(nan), "-");
  EXPECT_EQ(significant(-nan), "-");
  EXPECT_EQ(significant(infinity), "inf");
  EXPECT_EQ(significant(-infinity), "-inf");
  EXPECT_EQ(significant(0), "0");
  EXPECT_EQ(significant(-0.0), "0");
  EXPECT_THROW(significant(1, 0), std::logic_error);
}

TEST(Significant, IsWithinHalfOfTheLastDigit) {
  std::mt19937_64 random(7);
  std::uniform_real_distribution<double> mantissa(1, 10), power(-12, 12);
  for (int i = 0; i < 10'000; ++i) {
    const double value = mantissa(random) * std::pow(10.0, std::floor(power(random)));
    const std::string text = significant(value);
    double back = 0;
    ASSERT_EQ(std::from_chars(text.data(), text.data() + text.size(), back).ptr, text.data() + text.size()) << text;
    ASSERT_NEAR(back / value, 1, 5.0001e-4) << text;
  }
}

TEST(Utf8, WidthCountsCharactersAndNotBytes) {
  EXPECT_EQ(display_width("abc"), 3);
  EXPECT_EQ(display_width("°C µ"), 4);
  EXPECT_EQ(display_width("e\u0301"), 1);
  EXPECT_EQ(display_width("銅"), 2);
  EXPECT_EQ(display_width("\xC3"), 1);  // cut short: no reading past the end
}

TEST(Utf8, BadBytesAreReplacedAndGoodOnesKept) {
  EXPECT_EQ(readable_text("plain µ 銅 \U0001F600"), "plain µ 銅 \U0001F600");
  EXPECT_EQ(readable_text("\xC3(\x80\xFF"), "\uFFFD(\uFFFD\uFFFD");
  EXPECT_EQ(readable_text("\xC0\xAF"), "\uFFFD\uFFFD");                  // overlong
  EXPECT_EQ(readable_text("\xED\xA0\x80"), "\uFFFD\uFFFD\uFFFD");        // surrogate
  EXPECT_EQ(readable_text("\xF4\x90\x80\x80"), "\uFFFD\uFFFD\uFFFD\uFFFD");  // beyond the last plane
  EXPECT_EQ(readable_text("\xE2\x82"), "\uFFFD\uFFFD");                  // cut short
}

TextTableWriter example() {
  TextTableWriter table({{"stream", ""}, {"flow", "m3/h"}, {"T", "°C"}, {"note", ""}});
  table.add_row({"barren", 22.0, 25.0, "make-up, \"fresh\""});
  table.add_row({"lixiviant µ", 0.1 + 0.2, nan, ""});
  return table;
}

TEST(TextTable, AlignsNumbersRightAndTextLeft) {
  EXPECT_EQ(example().to_string(),
            "stream         flow      T  note\n"
            "               m3/h     °C\n"
            "-----------  ------  -----  ----------------\n"
            "barren        22.00  25.00  make-up, \"fresh\"\n"
            "lixiviant µ  0.3000      -\n");
}

TEST(TextTable, LeavesOutTheUnitLineWithoutUnitsAndShowsTheHeadWithoutRows) {
  EXPECT_EQ(TextTableWriter({{"unit", ""}, {"pH", ""}}).to_string(), "unit  pH\n----  --\n");
}

TEST(TextTable, ControlCharactersCannotBreakALine) {
  TextTableWriter table(std::vector<TableColumn>{{"name", ""}});
  table.add_row({"a\nb\x1B[31m"});
  EXPECT_EQ(table.to_string(), "name\n--------\na b [31m\n");
}

TEST(TextTable, CsvReadsBackToTheSameValue) {
  EXPECT_EQ(example().to_csv(),
            "stream,flow [m3/h],T [°C],note\r\n"
            "barren,22,25,\"make-up, \"\"fresh\"\"\"\r\n"
            "lixiviant µ,0.30000000000000004,,\r\n");
}

TEST(TextTable, RowsMustFit) {
  TextTableWriter table({{"a", ""}, {"b", ""}});
  EXPECT_THROW(table.add_row({1.0}), std::logic_error);
  EXPECT_THROW(TextTableWriter(std::vector<TableColumn>{}), std::logic_error);
}

}  // namespace
}  // namespace leat
