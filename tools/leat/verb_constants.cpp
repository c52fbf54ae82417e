#include <fmt/format.h>
#include <fmt/ranges.h>

#include <cmath>
#include <set>

#include "models/core/constants.hpp"
#include "models/core/nearest.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

std::string text_of(const std::vector<ReactionTerm>& reaction) {
  std::string left, right;
  for (const ReactionTerm& term : reaction) {
    std::string& side = term.coefficient < 0 ? left : right;
    const double size = std::abs(term.coefficient);
    side += fmt::format("{}{}{}", side.empty() ? "" : " + ", size == 1 ? "" : fmt::format("{:g} ", size), term.name);
  }
  return left + " = " + right;
}

// Collects what a pattern stands in.
class Search {
 public:
  Search(const SpeciesLibrary& library, const std::string& pattern) : library_(library), pattern_(pattern) {
    for (const SpeciesEntry& entry : library.species) add(entry.name, entry.reaction, entry.constant);
    for (const SolidEntry& entry : library.solids)
      if (entry.constant) add(entry.name, entry.reaction, *entry.constant);
    for (const ComponentEntry& entry : library.components) mention(entry.name, "component", entry.total_name);
    for (const SolidEntry& entry : library.solids)
      if (!entry.constant) mention(entry.name, entry.dissolves_as.empty() ? "mineral without a constant" : "metal, dissolves with an oxidant", entry.formula_text);
    for (const auto& [key, citation] : library.sources)
      if (used_.count(key)) sources.rows.push_back({key, citation});
    constants.note = fmt::format("{} constants", constants.rows.size());
  }

  ResultTable constants{"constants",
                        "",
                        {{"name", ""}, {"log10 K", "", 2}, {"spread", "", 2}, {"T", "degC"}, {"I", "mol/kg"}, {"enthalpy", "kJ/mol", 1}, {"reaction", ""}, {"evidence", ""}, {"source", ""}},
                        {}, ""};
  ResultTable sources{"sources", "Their sources", {{"key", ""}, {"source", ""}}, {}, ""};
  // What has no constant: components, which everything is made of, and minerals that only a law or `inert` can take.
  ResultTable others{"others", "Without a constant", {{"name", ""}, {"what it is", ""}, {"formula or total", ""}}, {}, ""};
  std::vector<std::string> names;

 private:
  using Cell = TextTableWriter::Cell;

  bool meant(const std::string& name, const std::string& text) {
    names.push_back(name);
    return pattern_.empty() || name.find(pattern_) != std::string::npos || text.find(pattern_) != std::string::npos;
  }

  void add(const std::string& name, const std::vector<ReactionTerm>& reaction, const EquilibriumConstant& constant) {
    const std::string text = text_of(reaction);
    if (!meant(name, text)) return;
    const Provenance& from = constant.provenance;
    const Cell spread = constant.spread_assigned ? Cell("assigned") : Cell(constant.spread);
    constants.rows.push_back({name, constant.log10_k, spread, constant.temperature - zero_celsius, constant.ionic_strength,
                              constant.enthalpy ? *constant.enthalpy / 1000 : std::nan(""), text, from.evidence,
                              from.source + (from.where.empty() ? "" : ": " + from.where)});
    used_.insert(from.source);
  }

  void mention(const std::string& name, const std::string& what, const std::string& formula) {
    if (meant(name, formula)) others.rows.push_back({name, what, formula});
  }

  const SpeciesLibrary& library_;
  const std::string& pattern_;
  std::set<std::string> used_;
};

}  // namespace

int constants_verb(const std::string& pattern, const Manner& manner) {
  Answer answer;
  answer.verb = "constants";
  if (!knows_csv(manner, {"constants", "sources", "others"}, answer)) return say(answer, manner);
  const SpeciesLibrary library = load_library();
  Search found(library, pattern);
  if (found.constants.rows.empty() && found.others.rows.empty()) {
    answer.exit_code = Exit::input_faults;
    answer.failure = fmt::format("nothing in the library has '{}' in its name or reaction{}", pattern, did_you_mean(pattern, found.names));
    return say(answer, manner);
  }
  answer.tables = {found.constants, found.sources, found.others};
  if (pattern.empty()) {
    std::set<std::string> families = {"hydroxo", "mixed", "free", "carbamato"};
    for (const ComponentEntry& entry : library.components)
      if (!entry.family.empty()) families.insert(entry.family);
    answer.closing = fmt::format("families: {}", fmt::join(families, ", "));
  }
  return say(answer, manner);
}

}  // namespace leat
