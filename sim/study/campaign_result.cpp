#include "sim/study/campaign_result.hpp"

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

}  // namespace leat
