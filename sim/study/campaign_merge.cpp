#include <fmt/format.h>

#include <bit>
#include <cmath>
#include <filesystem>
#include <map>
#include <optional>

#include "models/core/check.hpp"
#include "sim/study/campaign.hpp"
#include "sim/study/campaign_start.hpp"
#include "sim/study/ledger_lock.hpp"

namespace leat {
namespace {

namespace files = std::filesystem;
constexpr std::size_t most_told = 10;

// How much a row says about its case; more goes before less.
int weight(CaseStatus status) {
  switch (status) {
    case CaseStatus::waiting: return 0;
    case CaseStatus::machine_trouble: return 1;
    case CaseStatus::crashed:
    case CaseStatus::timed_out: return 2;  // on a better machine it may be solved
    default: return 3;
  }
}

bool same(double a, double b) { return (std::isnan(a) && std::isnan(b)) || std::bit_cast<std::uint64_t>(a) == std::bit_cast<std::uint64_t>(b); }

// What two rows of one case tell differently; empty if nothing.
std::string conflict(const CampaignCase& a, const CampaignCase& b, const std::vector<std::string>& watch) {
  if (a.status != b.status) return fmt::format("{} against {}", to_string(a.status), to_string(b.status));
  if (a.reason != b.reason) return fmt::format("'{}' against '{}'", a.reason, b.reason);
  for (std::size_t k = 0; k < watch.size(); ++k)
    if (!same(a.watched[k], b.watched[k])) return fmt::format("{} is {:.17g} against {:.17g}", watch[k], a.watched[k], b.watched[k]);
  return "";
}

class Merger {
 public:
  Merger(const CampaignSpec& spec, const CampaignSettings& settings, CampaignResult wanted)
      : spec_(spec), settings_(settings), wanted_(std::move(wanted)) {}

  // Rows of one more ledger; false if it is another campaign's.
  bool add(const std::string& path, bool as_part) {
    const Ledger ledger(path, false);
    const CampaignResult held = ledger.contents();
    const auto other = differences(held, ledger.terms(), wanted_, terms_of(spec_, settings_), as_part);
    if (!other.empty()) {
      trouble_ = fmt::format("{}: is the ledger of another campaign: {}", path, other.front());
      return false;
    }
    if (!held.watch_meanings.empty() && !held.watch_meanings.front().empty()) {
      wanted_.watch_units = held.watch_units;
      wanted_.watch_meanings = held.watch_meanings;
    }
    const auto missing = ledger.missing();
    for (const CampaignCase& row : held.cases) add(row, missing, path);
    return true;
  }

  const std::map<int, std::pair<CaseRecord, std::string>>& rows() const { return rows_; }
  const CampaignResult& wanted() const { return wanted_; }
  const std::string& trouble() const { return trouble_; }
  std::string conflicts() const {
    std::string text;
    for (std::size_t k = 0; k < conflicts_.size() && k < most_told; ++k) text += (k == 0 ? "" : "\n") + conflicts_[k];
    if (conflicts_.size() > most_told) text += fmt::format("\nand {} more", conflicts_.size() - most_told);
    return text;
  }

 private:
  void add(const CampaignCase& row, const std::map<std::pair<int, std::string>, std::string>& missing, const std::string& path) {
    if (weight(row.status) == 0) return;
    const auto found = rows_.find(row.number);
    if (found != rows_.end()) {
      const CampaignCase& held = found->second.first.row;
      if (weight(held.status) == 3 && weight(row.status) == 3) {
        const std::string how = conflict(held, row, wanted_.watch);
        if (!how.empty()) conflicts_.push_back(fmt::format("case {} is told differently by {} and {}: {}", row.number, found->second.second, path, how));
      }
      if (weight(held.status) >= weight(row.status)) return;
    }
    CaseRecord record{row, {}};
    for (const std::string& name : wanted_.watch) {
      const auto why = missing.find({row.number, name});
      record.missing.push_back(why == missing.end() ? "" : why->second);
    }
    if (!row.results_file.empty()) record.row.results_file = seen_from_ours(files::path(path).parent_path() / row.results_file);
    rows_[row.number] = {std::move(record), path};
  }

  std::string seen_from_ours(const files::path& file) const {
    const files::path folder = files::absolute(settings_.ledger).lexically_normal().parent_path();
    return files::absolute(file).lexically_normal().lexically_relative(folder).string();
  }

  const CampaignSpec& spec_;
  const CampaignSettings& settings_;
  CampaignResult wanted_;
  std::map<int, std::pair<CaseRecord, std::string>> rows_;  // by number, with the ledger it is from
  std::vector<std::string> conflicts_;
  std::string trouble_;
};

CampaignOutcome refused(std::string why) {
  CampaignOutcome outcome;
  outcome.ending = CampaignOutcome::refused;
  outcome.trouble = std::move(why);
  return outcome;
}

CampaignOutcome merge(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings, const std::vector<std::string>& shards) {
  Merger merger(spec, settings, waiting_campaign(spec, work, settings));
  for (const std::string& shard : shards) {
    std::error_code unused;
    if (files::equivalent(shard, settings.ledger, unused)) return refused(shard + ": is the ledger to merge into, not a shard's");
    if (!merger.add(shard, true)) return refused(merger.trouble());
  }
  const files::path folder = files::path(settings.ledger).parent_path();
  std::error_code error;
  if (!folder.empty()) files::create_directories(folder, error);
  if (error) throw LedgerTrouble(LedgerTrouble::machine, fmt::format("{}: {}", folder.string(), error.message()));
  const LedgerLock lock(settings.ledger);
  const bool is_new = !files::exists(settings.ledger);
  if (!is_new && !merger.add(settings.ledger, false)) return refused(merger.trouble() + ". Move it away, or give another name with --out");
  if (const std::string conflicts = merger.conflicts(); !conflicts.empty()) return refused(conflicts);
  if (is_new) Ledger::create(settings.ledger, merger.wanted(), terms_of(spec, settings));
  Ledger ledger(settings.ledger);
  if (!merger.wanted().watch_meanings.empty()) ledger.set_watched(merger.wanted().watch_units, merger.wanted().watch_meanings);
  for (const auto& [number, row] : merger.rows()) ledger.record(row.first);
  ledger.set_digest(ledger.contents().digest);
  ledger.close();
  CampaignOutcome outcome;
  outcome.solved_now = static_cast<int>(merger.rows().size());
  return outcome;
}

}  // namespace

CampaignOutcome merge_campaign(const CampaignSpec& spec, const CampaignWork& work, const CampaignSettings& settings, const std::vector<std::string>& shards) {
  check(settings.shard.whole(), "a merged ledger is no shard's");
  try {
    return merge(spec, work, settings, shards);
  } catch (const LedgerTrouble& trouble) {
    CampaignOutcome outcome = refused(trouble.what());
    if (trouble.kind() != LedgerTrouble::not_a_ledger) outcome.ending = CampaignOutcome::machine_trouble;
    return outcome;
  }
}

}  // namespace leat
