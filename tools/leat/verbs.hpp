#pragma once
#include <optional>
#include <string>
#include <vector>

#include "models/chemistry/species_library.hpp"
#include "models/core/diagnostics.hpp"
#include "sim/results/result_set.hpp"
#include "sim/results/whole_file.hpp"
#include "tools/leat/say.hpp"

namespace leat {

// Exit codes of the command.
enum Exit { done = 0, usage = 1, input_faults = 2, not_solved = 3, machine_trouble = 4, own_bug = 5 };

// What was typed behind a verb.
struct RunArguments {
  std::string file, out;       // out empty: a name of its own under outputs/
  Manner manner;
};
struct LadderArguments : RunArguments {
  std::string vary;            // PATH: from to in points; empty: the file is a ladder file
};
struct CampaignArguments : RunArguments {
  std::string shard;           // i/n
  std::vector<std::string> merge;  // ledgers of shards
  int workers = 0;             // 0: one a core
  bool retry = false;          // crashed and timed-out cases once more
};
struct ReportArguments : RunArguments {
  int pages = 10;              // of a ledger: pages of so many leading cases
};

int check_verb(const RunArguments& arguments);
int run_verb(const RunArguments& arguments);         // flowsheet or beaker: run and speciate
int speciate_verb(const RunArguments& arguments);    // beaker only
int constants_verb(const std::string& pattern, const Manner& manner);
int ladder_verb(const LadderArguments& arguments);
int campaign_verb(const CampaignArguments& arguments);
int report_verb(const ReportArguments& arguments);

// Shared by the verbs.
SpeciesLibrary load_library();                                   // throws std::logic_error if the embedded data is at fault
std::string read_text(const std::string& file, Diagnostics& diagnostics);  // a fault if it cannot be read
std::string default_output(const std::string& file, const std::string& ending);  // outputs/NAME + ending
std::string base_name(const std::string& file);
std::string page_beside(const std::string& results);             // outputs/NAME.html of outputs/NAME.h5
std::string reason_of(const Diagnostics& diagnostics);           // the first fault, and how many more there are
std::vector<std::string> lines_of(const ResultSet& results, const char* texts);  // of a single text, without empty ones
// False, with the reason in the answer, where a file cannot be written; else it is among those written.
bool written(const FileOutcome& outcome, const std::string& what, const std::string& path, Answer& answer);
// False, with the reason in the answer, where --out names the input or a file that is no results file: nobody means to lose those.
bool may_replace(const std::string& out, const std::string& input, Answer& answer);
std::string program_identity();                                  // name, version and library: what results depend on besides the input
std::string program_name();                                      // leat 0.1.0

// Ctrl-C: from here on a first SIGINT or SIGTERM asks to stop (stop_asked), a second one ends the program as usual.
void listen_for_stop();
bool stop_asked();

}  // namespace leat
