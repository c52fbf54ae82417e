#pragma once
#include <optional>
#include <string>
#include <vector>

#include "sim/results/result_set.hpp"
#include "sim/run/run_result.hpp"
#include "sim/study/study_spec.hpp"

namespace leat {

// One rung of a ladder: the case with one value put in.
struct LadderRung {
  std::optional<ResultSet> results;   // of the case; nothing where it was not solved
  std::string status;                 // solved, not_solved or input_fault
  std::string reason;                 // why it is not solved
  std::vector<Caution> cautions;
};

// A ladder as it stands in its file (outputs/README.md, "In a ladder"). rungs: those of each series, in order; fewer than the
// series has values where the ladder was stopped, which `failure` tells.
ResultSet layout_of(const LadderSpec& ladder, const std::vector<std::vector<LadderRung>>& rungs, const std::string& program, const std::string& failure = "");

}  // namespace leat
