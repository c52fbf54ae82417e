#include <fmt/format.h>

#include <algorithm>

#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"
#include "sim/results/table_text.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {

int constants_verb(const std::string& pattern) {
  const SpeciesLibrary library = load_library();
  TextTableWriter table({{"name", ""}, {"log10 K", ""}, {"spread", ""}, {"T", "degC"}, {"I", "mol/kg"}, {"enthalpy", "kJ/mol"}, {"reaction", ""}, {"evidence", ""}, {"source", ""}});
  std::vector<std::string> names;
  int rows = 0;
  const auto add = [&](const std::string& name, const std::vector<ReactionTerm>& reaction, const EquilibriumConstant& constant) {
    names.push_back(name);
    std::string left, right;
    for (const ReactionTerm& term : reaction) {
      std::string& side = term.coefficient < 0 ? left : right;
      const double size = std::abs(term.coefficient);
      side += fmt::format("{}{}{}", side.empty() ? "" : " + ", size == 1 ? "" : fmt::format("{:g} ", size), term.name);
    }
    const std::string text = left + " = " + right;
    if (!pattern.empty() && name.find(pattern) == std::string::npos && text.find(pattern) == std::string::npos) return;
    table.add_row({name, fmt::format("{:.2f}", constant.log10_k), constant.spread_assigned ? "assigned" : fmt::format("{:.2f}", constant.spread),
                   constant.temperature - zero_celsius, constant.ionic_strength, constant.enthalpy ? fmt::format("{:.1f}", *constant.enthalpy / 1000) : "-", text,
                   constant.provenance.evidence, constant.provenance.source + (constant.provenance.where.empty() ? "" : ": " + constant.provenance.where)});
    ++rows;
  };
  for (const SpeciesEntry& entry : library.species) add(entry.name, entry.reaction, entry.constant);
  for (const SolidEntry& entry : library.solids)
    if (entry.constant) add(entry.name, entry.reaction, *entry.constant);
  if (rows == 0) {
    fmt::print(stderr, "no constant has '{}' in its name or reaction{}\n", pattern, did_you_mean(pattern, names));
    return Exit::input_faults;
  }
  fmt::print("{}", table.to_string());
  fmt::print("{} of {} constants; keys of sources:\n", rows, names.size());
  for (const auto& [key, citation] : library.sources) fmt::print("  {}: {}\n", key, citation);
  return Exit::done;
}

}  // namespace leat
