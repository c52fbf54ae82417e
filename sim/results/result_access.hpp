// result_access: looks things up in a ResultSet by name.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "sim/results/result_set.hpp"

namespace leat {

// Null or empty when there is none of that name.
const Axis* find_axis(const ResultSet& results, std::string_view name);
const Variable* find_variable(const ResultSet& results, std::string_view name);
const TextTable* find_texts(const ResultSet& results, std::string_view name);
const Flags* find_flags(const ResultSet& results, std::string_view name);
std::string attribute(const ResultSet& results, std::string_view name);
std::size_t axis_size(const ResultSet& results, std::string_view name);  // 0 when there is none

// One number of a results file, named as NAME.LABEL.LABEL@MOMENT: recovery.Ag, recovery_by_family.Ag.ammine, ph.L.1,
// reagent_consumption.ammonia, recovery.Ag@12 h, recovery.Ag@last, dissolved.Ag(I)@filtered, recovery.Ag@rung 5.
// A label goes on every axis but time, step and rung, in the order of the axes; labels may hold points themselves.
// Without a moment: the steady state of a run (steady_NAME) if the file has it, else the last row; of a beaker the last step.
struct NamedValue {
  double value = 0;         // NaN where the file has none
  std::string units;        // as in the file
  std::string long_name;
};

// Nothing, and why with the nearest name in `fault`, when the file has no such number.
std::optional<NamedValue> find_value(const ResultSet& results, std::string_view name, std::string& fault);

}  // namespace leat
