#include "sim/study/campaign_result.hpp"

#include <algorithm>
#include <sstream>

namespace leat {

std::string to_string(CaseStatus status) {
  switch (status) {
    case CaseStatus::waiting: return "waiting";
    case CaseStatus::done: return "done";
    case CaseStatus::input_fault: return "input_fault";
    case CaseStatus::not_solved: return "not_solved";
    case CaseStatus::timed_out: return "timed_out";
    case CaseStatus::crashed: return "crashed";
    case CaseStatus::machine_trouble: return "machine_trouble";
  }
  return "waiting";
}

std::vector<std::string> cautions_of(const std::vector<CampaignCase>& cases) {
  struct Kind {
    std::string name, line;
    int first = 0, count = 0;
  };
  std::vector<Kind> kinds;
  std::string closing;
  for (const CampaignCase& one : cases) {
    std::istringstream lines(one.cautions);
    std::vector<std::string> read;
    for (std::string line; std::getline(lines, line);)
      if (!line.empty()) read.push_back(line);
    if (read.empty()) continue;
    closing = read.back();
    for (std::size_t k = 0; k + 1 < read.size(); ++k) {
      const std::string name = read[k].substr(0, read[k].find(':'));
      auto found = std::find_if(kinds.begin(), kinds.end(), [&](const Kind& kind) { return kind.name == name; });
      if (found == kinds.end()) found = kinds.insert(kinds.end(), {name, read[k], one.number, 0});
      ++found->count;
    }
  }
  std::vector<std::string> out;
  for (const Kind& kind : kinds)
    out.push_back(kind.line + " (case " + std::to_string(kind.first) + "; " + std::to_string(kind.count) + (kind.count == 1 ? " case has" : " cases have") + " such a caution)");
  if (!closing.empty()) out.push_back(closing);
  return out;
}

}  // namespace leat
