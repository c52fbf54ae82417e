// A campaign: every case of a specification solved once, each in a worker of its own, all told to a ledger. It may be killed
// at any moment and started again; the ledger ends the same, for any number of workers.
#pragma once

#include <functional>
#include <string>
#include <vector>

#include "models/core/diagnostics.hpp"
#include "sim/study/campaign_cases.hpp"
#include "sim/study/case_answer.hpp"
#include "sim/study/study_spec.hpp"

namespace leat {

// What the room above lends. `text` and `solve` depend on nothing but their arguments; `solve` is called in workers.
struct CampaignWork {
  std::function<std::string(const Inputs& inputs)> text;  // a variant of the base case
  // A case; writes its results file there, whole, unless the name is empty.
  std::function<CaseAnswer(const std::string& text, const std::string& results_file)> solve;
};

struct CampaignProgress {
  int total = 0, finished = 0, failed = 0;  // failed: of the finished ones, all but done
  int under_way = 0;
  int finished_now = 0;                     // since this start
  double seconds = 0;                       // since this start [s]
};

struct CampaignSettings {
  std::string ledger;                 // outputs/NAME.ledger; results files go to outputs/NAME.cases
  std::string program;                // leat 0.1.0
  std::string results_format;         // its version
  Shard shard;
  int workers = 0;                    // 0: one a core
  bool retry = false;                 // solve crashed and timed-out cases once more
  double grace = 2;                   // for cases under way to end after a stop [s]
  std::function<bool()> stop;                                 // may be empty
  std::function<void(const CampaignProgress&)> progress;      // often; may be empty
};

struct CampaignOutcome {
  enum Ending {
    finished,        // every case has its row
    refused,         // `faults`, or `trouble` about a ledger of something else; nothing is written
    stopped,         // asked to; a later start goes on
    machine_trouble, // `trouble`; the ledger is as good as it was
  };
  Ending ending = finished;
  Diagnostics faults;
  std::string trouble;
  int solved_now = 0;     // cases that got their row in this start
  double seconds = 0;     // of this start [s]
  int workers = 0;
};

CampaignOutcome run_campaign(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings);

// Rows of shards put together in settings.ledger, which is made if it is not there. Ledgers of another campaign, and cases
// that two ledgers tell differently, are refused by name; what no ledger has stays waiting.
CampaignOutcome merge_campaign(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings,
                               const std::vector<std::string>& shards);

std::string cases_folder(const std::string& ledger);              // outputs/NAME.cases
std::string results_file_name(int number);                        // 000123.h5

}  // namespace leat
