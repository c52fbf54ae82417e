#pragma once
#include "sim/run/run_result.hpp"

namespace leat {

// What a run tells on the terminal: stream table, stage profile, recovery by family, reagent use, closure, history, cautions.
void print_run(const RunResult& result);
void print_cautions(const std::vector<Caution>& cautions);

}  // namespace leat
