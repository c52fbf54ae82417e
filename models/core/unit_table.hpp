// The units that are read, the words that are refused with a hint, and the names of dimensions. Used by quantity.cpp alone.
// A new unit is one row in unit_rows, below the rows it is made of.
#pragma once

#include <stdexcept>
#include <string_view>
#include <utility>

#include "models/core/constants.hpp"

namespace leat {

// One symbol: factor times a unit made of symbols above it. Each letter of `prefixes` makes one more symbol; a prefix
// that would read as something else (cd, ha, mt, pH) is simply not in the list.
struct UnitRow {
  const char* symbol;
  double factor;  // [base]
  const char* base;
  const char* prefixes;
};

inline constexpr const char* normal_cubic_metre = "NormalCubicMetre";  // name for the unit parser, which reads Nm3 as (Nm)^3

inline constexpr UnitRow unit_rows[] = {
    {"s", 1, "s", "num"},          {"min", 60, "s", ""},        {"h", 3600, "s", ""},
    {"d", 86400, "s", ""},         {"a", 365.25 * 86400, "s", ""},
    {"m", 1, "m", "numcdk"},       {"L", 1e-3, "m^3", "numcdhkM"}, {"l", 1e-3, "m^3", "numcdh"},
    {"g", 1e-3, "kg", "numMG"},    {"t", 1e3, "kg", "kM"},
    {"mol", 1, "mol", "numk"},     {"M", 1e3, "mol/m^3", "num"},
    {"K", 1, "K", "m"},            {"A", 1, "A", "umk"},
    {"N", 1, "kg.m/s^2", "k"},     {"Pa", 1, "N/m^2", "mhkMG"}, {"bar", 1e5, "Pa", "m"},
    {"atm", standard_atmosphere, "Pa", ""},
    {"J", 1, "N.m", "mkMG"},       {"cal", 4.184, "J", "k"},    {"W", 1, "J/s", "mkMG"},
    {"Wh", 3600, "J", "kMG"},      {"V", 1, "W/A", "umk"},      {"S", 1, "A/V", "um"},
    {"P", 0.1, "Pa.s", "mc"},
    {"%", 1e-2, "1", ""},          {"ppm", 1e-6, "1", ""},      {"ppb", 1e-9, "1", ""},
    // Amount of ideal gas in 1 m3 at 0 degC and one standard atmosphere: n = p V / (R T) = 44.615 mol.
    {normal_cubic_metre, standard_atmosphere / (gas_constant * zero_celsius), "mol", ""},
};

inline double prefix_factor(char prefix) {
  constexpr std::pair<char, double> rows[] = {{'n', 1e-9}, {'u', 1e-6}, {'m', 1e-3}, {'c', 1e-2}, {'d', 1e-1},
                                              {'h', 1e2},  {'k', 1e3},  {'M', 1e6},  {'G', 1e9}};
  for (const auto& [letter, factor] : rows) {
    if (letter == prefix) return factor;
  }
  throw std::logic_error("a prefix without a factor");
}

// Words that mean two things, or nothing here, and what to write instead.
inline constexpr std::pair<std::string_view, std::string_view> hint_rows[] = {
    {"ton", "could be 1000 kg or 907 kg or 1016 kg; write t for 1000 kg"}, {"tonne", "is written t"}, {"tonnes", "is written t"},
    {"tons", "could be 1000 kg or 907 kg or 1016 kg; write t for 1000 kg"}, {"mt", "is not read; write t for 1000 kg"},
    {"gal", "could be an American or an imperial gallon, or an acceleration; write L"}, {"gpm", "is not read; write m3/h"},
    {"oz", "could be a mass, a troy mass or a volume; write g"}, {"cfm", "is not read; write m3/h"},
    {"C", "could be degrees Celsius or a charge; write degC, or A.s for a charge"}, {"degF", "is not read; write degC or K"},
    {"F", "could be degrees Fahrenheit or a capacitance; write degC or K"}, {"psi", "is not read; write kPa"},
    {"Cal", "could be 4.184 J or 4184 J; write cal or kcal"}, {"lb", "is not read; write kg"}, {"lbs", "is not read; write kg"},
    {"Nm", "could be a torque or a normal cubic metre; write N.m, or Nm3"}, {"ft", "is not read; write m"},
    {"Sm", "has no agreed standard state; write Nm3 or mol"}, {"scm", "has no agreed standard state; write Nm3 or mol"},
    {"wt%", "is not read; a mass ratio is written 8 % or 0.08 kg/kg"}, {"ha", "is not read; write m2"},
    {"sec", "is written s"}, {"seconds", "is written s"}, {"minutes", "is written min"}, {"hr", "is written h"}, {"hrs", "is written h"},
    {"hour", "is written h"}, {"hours", "is written h"}, {"day", "is written d"}, {"days", "is written d"}, {"yr", "is written a"},
    {"year", "is written a"}, {"years", "is written a"}, {"Hz", "is written 1/s"}, {"rpm", "is written 1/min"}, {"tpd", "is written t/d"},
    {"tph", "is written t/h"}, {"gpl", "is written g/L"}, {"cc", "is written mL"}, {"percent", "is written %"},
};

// What each dimension is called and how a value of it is typed.
struct DimensionRow {
  const char* unit;
  const char* name;
  const char* example;
};

inline constexpr DimensionRow dimension_rows[] = {
    {"s", "a time", "6 h"}, {"m3", "a volume", "120 m3"}, {"kg", "a mass", "5 t"},
    {"mol", "an amount of substance", "3 mol"}, {"m", "a length", "75 um"}, {"K", "a temperature", "25 degC"},
    {"J/mol", "an energy per amount", "55 kJ/mol"}, {"J/mol/K", "an energy per amount and temperature", "75 J/mol/K"},
    {"mol/m3", "a concentration", "4 mol/L"}, {"kg/m3", "a density or mass concentration", "30 g/L"},
    {"m3/s", "a volume flow", "12 m3/h"}, {"kg/s", "a mass flow", "100 t/h"}, {"mol/s", "an amount flow", "50 Nm3/h"},
    {"1/s", "a rate per time", "20 1/h"}, {"Pa", "a pressure", "2 bar"}, {"1", "a ratio", "8 %"},
    {"V", "an electric potential", "0.45 V"}, {"mol/kg", "a molality", "0.5 mol/kg"}, {"m2", "an area", "10 m2"},
    {"m/s", "a speed", "2 m/h"}, {"J", "an energy", "50 kWh"}, {"W", "a power", "30 kW"}, {"Pa.s", "a viscosity", "1.2 cP"},
    {"mol/m2/s", "an amount flow per area", "2e-6 mol/m2/s"}, {"mol/m3/s", "an amount per volume and time", "3 mol/m3/h"},
    {"kg/m2/s", "a mass flow per area", "0.5 t/m2/h"}, {"m3/mol", "a volume per amount", "22 mL/mol"}, {"kg/mol", "a molar mass", "63.5 g/mol"},
    {"m2/s", "a diffusivity", "1e-9 m2/s"}, {"m2/kg", "an area per mass", "0.3 m2/g"}, {"m3/kg", "a volume per mass", "2 L/kg"},
    {"J/kg", "an energy per mass", "15 kWh/t"}, {"W/m3", "a power per volume", "1 kW/m3"}, {"A", "a current", "20 A"},
    {"J/kg/K", "a heat capacity per mass", "4.18 kJ/kg/K"}, {"W/K", "a heat flow per temperature", "2 kW/K"}, {"W/m2/K", "a heat transfer coefficient", "300 W/m2/K"},
};

}  // namespace leat
