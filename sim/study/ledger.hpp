// Ledger: what became of every case of a campaign, in one SQLite file that the sqlite3 shell reads.
//   campaign(name, value)       facts: kind, format_version, program, title, file, text, base_file, base_text, digest ...
//   varied(position, path, unit)         watched(position, name, unit, meaning)
//   cases(number, hash, status, reason, reason_group, seconds, results_file, cautions)
//   inputs(number, path, value)          results(number, watched, value, missing)     missing: why there is no value
//   overview                             a view: a row a case with its inputs and watched values side by side
// All cases stand there as `waiting` from the first moment: the file appears whole, under a temporary name until then. Then
// each finished case is one transaction into a write-ahead log with synchronous = NORMAL: a killed program loses nothing, a
// power failure at most the last rows, never their consistency; those cases then wait and are done again. A ledger that
// nobody works on is a single file.
#pragma once

#include <map>
#include <memory>
#include <optional>
#include <set>
#include <string>
#include <utility>
#include <vector>

#include "sim/study/campaign_result.hpp"
#include "sim/study/ledger_trouble.hpp"

namespace leat {

inline constexpr int ledger_format = 1;

// All of a ledger; nothing, with why, if it cannot be read. The reasons tell apart: not there, not a ledger, of a newer
// leat, damaged, locked.
std::optional<CampaignResult> read_ledger(const std::string& path, std::string& fault);

// What decides a campaign's results besides its cases.
struct LedgerTerms {
  std::string results_format;
  bool through_time = true, keep_results = true;
};

// What is told of a finished case beyond its row.
struct CaseRecord {
  CampaignCase row;
  std::vector<std::string> missing;  // one a watched name; empty where there is a value
};

class Ledger {
 public:
  // Puts the file in place, all cases as they are in `campaign`. All of these throw LedgerTrouble.
  static void create(const std::string& path, const CampaignResult& campaign, const LedgerTerms& terms);
  explicit Ledger(const std::string& path, bool to_write = true);
  ~Ledger();

  CampaignResult contents() const;
  LedgerTerms terms() const;
  std::map<std::pair<int, std::string>, std::string> missing() const;  // (case, watched name) to why it has no value, where so

  void record(const CaseRecord& record);                // one transaction
  void wait_again(const std::set<CaseStatus>& statuses);// back to waiting, as if never done
  void wait_again(const std::vector<int>& numbers);     // the same by case
  void set_watched(const std::vector<std::string>& units, const std::vector<std::string>& meanings);
  void set_facts(const CampaignResult& campaign);       // title, file, text and ranking, which may change
  void set_digest(const std::string& digest);
  void close();                                         // back to a single file

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

}  // namespace leat
