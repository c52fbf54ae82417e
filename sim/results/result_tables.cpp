#include "sim/results/result_tables.hpp"

#include <stdexcept>

#include "sim/results/result_access.hpp"
#include "sim/results/result_tables_parts.hpp"

namespace leat {

std::vector<ResultTable> tables_of(const ResultSet& results) {
  const std::string kind = attribute(results, "leat_kind");
  if (kind == "run") return run_tables(results);
  if (kind == "beaker") return beaker_tables(results);
  if (kind == "ladder") return ladder_tables(results);
  throw std::logic_error("there are no tables of results of the kind '" + kind + "'");
}

std::vector<std::string> table_names(const std::string& kind) {
  if (kind == "run") return {"streams", "stages", "recovery", "metals", "reagents", "history", "closure"};
  if (kind == "beaker") return {"steps", "dissolved", "holders", "saturation", "closure"};
  if (kind == "ladder") return {"ladder", "distribution", "failures"};
  if (kind == "campaign") return {"status", "ranking", "failures", "cases"};
  return {};
}

std::string listed(const std::vector<std::string>& words) {
  std::string text;
  for (const std::string& word : words) text += (text.empty() ? "" : ", ") + word;
  return text.empty() ? "-" : text;
}

}  // namespace leat
