// CaseAnswer: what one case of a campaign came to, on its way from a worker.
#pragma once

#include <limits>
#include <string>
#include <string_view>
#include <vector>

#include "sim/study/campaign_result.hpp"

namespace leat {

// One watched name in a case that was solved.
struct WatchedValue {
  double value = std::numeric_limits<double>::quiet_NaN();
  std::string unit, meaning;
  std::string missing;        // why the case has no such number; empty if it has
};

struct CaseAnswer {
  CaseStatus status = CaseStatus::done;  // done, input_fault, not_solved or machine_trouble
  std::string reason;                    // why it is not done
  std::vector<WatchedValue> watched;     // one a watched name if done
  std::string cautions;                  // of its results, a line each
  bool file_written = false;             // its results file is in place
};

std::string to_bytes(const CaseAnswer& answer);
CaseAnswer case_answer(std::string_view bytes);  // of to_bytes; std::logic_error for anything else

}  // namespace leat
