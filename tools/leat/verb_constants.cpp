#include <fmt/format.h>
#include <fmt/ranges.h>

#include <cmath>
#include <set>

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
  std::set<std::string> used;
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
    used.insert(constant.provenance.source);
    ++rows;
  };
  for (const SpeciesEntry& entry : library.species) add(entry.name, entry.reaction, entry.constant);
  for (const SolidEntry& entry : library.solids)
    if (entry.constant) add(entry.name, entry.reaction, *entry.constant);
  // What has no constant: components, which everything is made of, and minerals that only a law or `inert` can take.
  TextTableWriter others({{"name", ""}, {"what it is", ""}, {"formula or total", ""}});
  int other_rows = 0;
  const auto mention = [&](const std::string& name, const std::string& what, const std::string& formula) {
    names.push_back(name);
    if (!pattern.empty() && name.find(pattern) == std::string::npos && formula.find(pattern) == std::string::npos) return;
    others.add_row({name, what, formula});
    ++other_rows;
  };
  for (const ComponentEntry& entry : library.components) mention(entry.name, "component", entry.total_name);
  for (const SolidEntry& entry : library.solids)
    if (!entry.constant) mention(entry.name, entry.dissolves_as.empty() ? "mineral without a constant" : "metal, dissolves with an oxidant", entry.formula_text);
  if (rows + other_rows == 0) {
    fmt::print(stderr, "nothing in the library has '{}' in its name or reaction{}\n", pattern, did_you_mean(pattern, names));
    return Exit::input_faults;
  }
  if (rows > 0) {
    fmt::print("{}{} constants; their sources:\n", table.to_string(), rows);
    for (const auto& [key, citation] : library.sources)
      if (used.count(key)) fmt::print("  {}: {}\n", key, citation);
  }
  if (other_rows > 0) fmt::print("{}{}", rows > 0 ? "\n" : "", others.to_string());
  if (pattern.empty()) {
    std::set<std::string> families = {"hydroxo", "mixed", "free", "carbamato"};
    for (const ComponentEntry& entry : library.components)
      if (!entry.family.empty()) families.insert(entry.family);
    fmt::print("\nfamilies: {}\n", fmt::join(families, ", "));
  }
  return Exit::done;
}

}  // namespace leat
