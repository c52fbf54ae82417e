// What a campaign's ledger holds, as plain data.
#pragma once

#include <string>
#include <vector>

namespace leat {

enum class CaseStatus { waiting, done, input_fault, not_solved, timed_out, crashed, machine_trouble };
std::string to_string(CaseStatus status);                  // one word each, as in the ledger: waiting, done, input_fault ...

struct CampaignCase {
  int number = 0;                    // from 1, in the order of the campaign file
  std::string hash;                  // of all that decides the result, 32 hex digits
  std::vector<std::string> inputs;   // one a varied path, as typed
  CaseStatus status = CaseStatus::waiting;
  std::string reason;                // why it is not done; empty if it is
  std::string reason_group;          // the same without the case's own numbers, to count by
  double seconds = 0;                // [s]
  std::vector<double> watched;       // one a watched name; NaN where there is none
  std::string results_file;          // from the ledger's folder; empty if none is kept
  std::string cautions;              // of the case, a line each: "kind: text"
  std::string page;                  // from the page's folder; empty if there is none
};

struct CampaignResult {
  std::string title, file, program;
  std::string campaign_text, base_file, base_text;
  std::vector<std::string> paths;            // varied
  std::vector<std::string> path_units;       // "" where values are no quantities
  std::vector<std::string> watch, watch_units, watch_meanings;
  std::string rank_by;
  bool largest_first = true;
  std::string shard;                         // "2/3", empty for a whole campaign
  std::vector<CampaignCase> cases;           // by number
  std::vector<std::string> cautions;         // of all cases, one line a kind with the number of cases; the sentence on safety last
  std::string digest;                        // of all cases but their seconds
};

// One line a kind of caution: that of the first case that has it, and how many have it. A sentence that all cases with
// cautions end with stands last, once.
std::vector<std::string> cautions_of(const std::vector<CampaignCase>& cases);

}  // namespace leat
