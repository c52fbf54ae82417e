#include "sim/study/ledger.hpp"

#include <fmt/format.h>

#include <cmath>
#include <filesystem>
#include <limits>

#include "models/core/check.hpp"
#include "sim/study/campaign_cases.hpp"
#include "sim/study/ledger_database.hpp"

namespace leat {
namespace {

namespace files = std::filesystem;
using Statement = LedgerDatabase::Statement;

constexpr int application = 0x6c656174;  // "leat": the file's own mark in an SQLite file
constexpr std::size_t widest_view = 500; // columns of inputs and values

constexpr const char* schema = R"(
CREATE TABLE campaign(name TEXT PRIMARY KEY, value TEXT NOT NULL) WITHOUT ROWID;
CREATE TABLE varied(position INTEGER PRIMARY KEY, path TEXT NOT NULL, unit TEXT NOT NULL);
CREATE TABLE watched(position INTEGER PRIMARY KEY, name TEXT NOT NULL, unit TEXT NOT NULL, meaning TEXT NOT NULL);
CREATE TABLE cases(number INTEGER PRIMARY KEY, hash TEXT NOT NULL, status TEXT NOT NULL, reason TEXT NOT NULL DEFAULT '',
                   reason_group TEXT NOT NULL DEFAULT '', seconds REAL NOT NULL DEFAULT 0, results_file TEXT NOT NULL DEFAULT '',
                   cautions TEXT NOT NULL DEFAULT '');
CREATE TABLE inputs(number INTEGER NOT NULL REFERENCES cases, path TEXT NOT NULL, value TEXT NOT NULL, PRIMARY KEY(number, path)) WITHOUT ROWID;
CREATE TABLE results(number INTEGER NOT NULL REFERENCES cases, watched TEXT NOT NULL, value REAL, missing TEXT NOT NULL DEFAULT '',
                     PRIMARY KEY(number, watched)) WITHOUT ROWID;
)";

// A text between two of these marks, in SQL.
std::string quoted(const std::string& text, char mark) {
  std::string out(1, mark);
  for (const char sign : text) out += sign == mark ? std::string(2, mark) : std::string(1, sign);
  return out + mark;
}

std::string overview(const CampaignResult& campaign) {
  std::string view = "CREATE VIEW overview AS SELECT number, status, reason, seconds";
  for (const std::string& path : campaign.paths)
    view += fmt::format(", (SELECT value FROM inputs i WHERE i.number = c.number AND path = {}) AS {}", quoted(path, '\''), quoted(path, '"'));
  for (const std::string& name : campaign.watch)
    view += fmt::format(", (SELECT value FROM results r WHERE r.number = c.number AND watched = {}) AS {}", quoted(name, '\''), quoted(name, '"'));
  return view + " FROM cases c ORDER BY number";
}

CaseStatus status_of(const std::string& word, const std::string& path) {
  for (const CaseStatus status : {CaseStatus::waiting, CaseStatus::done, CaseStatus::input_fault, CaseStatus::not_solved, CaseStatus::timed_out,
                                  CaseStatus::crashed, CaseStatus::machine_trouble})
    if (to_string(status) == word) return status;
  throw LedgerTrouble(LedgerTrouble::damaged, fmt::format("{}: is damaged: a case has the status '{}'", path, word));
}

// A file that says it is a ledger this program knows, whole as far as SQLite can tell.
void check_ledger(LedgerDatabase& database) {
  const std::string& path = database.path();
  std::error_code error;
  if (files::is_directory(path, error) || files::file_size(path, error) == 0) throw LedgerTrouble(LedgerTrouble::not_a_ledger, path + ": is not a ledger");
  if (database.number("PRAGMA application_id") != application) throw LedgerTrouble(LedgerTrouble::not_a_ledger, path + ": is an SQLite file, but not a ledger");
  const long long format = database.number("PRAGMA user_version");
  if (format > ledger_format)
    throw LedgerTrouble(LedgerTrouble::not_a_ledger, fmt::format("{}: was written by a newer leat (ledger format {}; this one knows {})", path, format, ledger_format));
  const std::string sound = database.text("PRAGMA quick_check(1)");
  if (sound != "ok") throw LedgerTrouble(LedgerTrouble::damaged, fmt::format("{}: is damaged: {}", path, sound));
}

void set_fact(LedgerDatabase& database, const std::string& name, const std::string& value) {
  Statement(database, "INSERT INTO campaign VALUES(?1, ?2) ON CONFLICT(name) DO UPDATE SET value = ?2").bind(name).bind(value).step();
}

std::string fact(LedgerDatabase& database, const std::string& name) {
  Statement statement(database, "SELECT value FROM campaign WHERE name = ?");
  return statement.bind(name).step() ? statement.text(0) : "";
}

void write_changing_facts(LedgerDatabase& database, const CampaignResult& campaign) {
  set_fact(database, "title", campaign.title);
  set_fact(database, "file", campaign.file);
  set_fact(database, "text", campaign.campaign_text);
  set_fact(database, "rank_by", campaign.rank_by);
  set_fact(database, "best", campaign.largest_first ? "largest" : "smallest");
}

void write_facts(LedgerDatabase& database, const CampaignResult& campaign, const LedgerTerms& terms) {
  write_changing_facts(database, campaign);
  set_fact(database, "kind", "campaign");
  set_fact(database, "format_version", std::to_string(ledger_format));
  set_fact(database, "program", campaign.program);
  set_fact(database, "base_file", campaign.base_file);
  set_fact(database, "base_text", campaign.base_text);
  set_fact(database, "shard", campaign.shard);
  set_fact(database, "case_count", std::to_string(campaign.cases.size()));
  set_fact(database, "results_format_version", terms.results_format);
  set_fact(database, "through_time", terms.through_time ? "true" : "false");
  set_fact(database, "keep_results", terms.keep_results ? "true" : "false");
  Statement varied(database, "INSERT INTO varied VALUES(?, ?, ?)");
  for (std::size_t k = 0; k < campaign.paths.size(); ++k) varied.bind(static_cast<long long>(k + 1)).bind(campaign.paths[k]).bind(campaign.path_units[k]).step();
  Statement watched(database, "INSERT INTO watched VALUES(?, ?, ?, ?)");
  for (std::size_t k = 0; k < campaign.watch.size(); ++k)
    watched.bind(static_cast<long long>(k + 1)).bind(campaign.watch[k]).bind(campaign.watch_units[k]).bind(campaign.watch_meanings[k]).step();
}

void write_cases(LedgerDatabase& database, const CampaignResult& campaign) {
  Statement cases(database, "INSERT INTO cases(number, hash, status) VALUES(?, ?, 'waiting')");
  Statement inputs(database, "INSERT INTO inputs VALUES(?, ?, ?)");
  for (const CampaignCase& one : campaign.cases) {
    cases.bind(static_cast<long long>(one.number)).bind(one.hash).step();
    for (std::size_t k = 0; k < campaign.paths.size(); ++k) inputs.bind(static_cast<long long>(one.number)).bind(campaign.paths[k]).bind(one.inputs[k]).step();
  }
}

void read_facts(LedgerDatabase& database, CampaignResult& campaign) {
  campaign.title = fact(database, "title");
  campaign.file = fact(database, "file");
  campaign.program = fact(database, "program");
  campaign.campaign_text = fact(database, "text");
  campaign.base_file = fact(database, "base_file");
  campaign.base_text = fact(database, "base_text");
  campaign.rank_by = fact(database, "rank_by");
  campaign.largest_first = fact(database, "best") != "smallest";
  campaign.shard = fact(database, "shard");
  Statement varied(database, "SELECT path, unit FROM varied ORDER BY position");
  while (varied.step()) {
    campaign.paths.push_back(varied.text(0));
    campaign.path_units.push_back(varied.text(1));
  }
  Statement watched(database, "SELECT name, unit, meaning FROM watched ORDER BY position");
  while (watched.step()) {
    campaign.watch.push_back(watched.text(0));
    campaign.watch_units.push_back(watched.text(1));
    campaign.watch_meanings.push_back(watched.text(2));
  }
}

template <class Value>
std::map<std::string, std::size_t> positions(const std::vector<Value>& names) {
  std::map<std::string, std::size_t> at;
  for (std::size_t k = 0; k < names.size(); ++k) at[names[k]] = k;
  return at;
}

void read_cases(LedgerDatabase& database, CampaignResult& campaign) {
  std::map<long long, std::size_t> of;
  Statement cases(database, "SELECT number, hash, status, reason, reason_group, seconds, results_file, cautions FROM cases ORDER BY number");
  while (cases.step()) {
    CampaignCase one;
    one.number = static_cast<int>(cases.integer(0));
    one.hash = cases.text(1);
    one.status = status_of(cases.text(2), database.path());
    one.reason = cases.text(3);
    one.reason_group = cases.text(4);
    one.seconds = cases.number(5);
    one.results_file = cases.text(6);
    one.cautions = cases.text(7);
    one.inputs.resize(campaign.paths.size());
    one.watched.assign(campaign.watch.size(), std::numeric_limits<double>::quiet_NaN());
    of[one.number] = campaign.cases.size();
    campaign.cases.push_back(std::move(one));
  }
  const auto spread = [&](const std::string& sql, const std::map<std::string, std::size_t>& at, const auto& put) {
    Statement rows(database, sql);
    while (rows.step()) {
      const auto row = of.find(rows.integer(0));
      const auto column = at.find(rows.text(1));
      if (row == of.end() || column == at.end()) throw LedgerTrouble(LedgerTrouble::damaged, database.path() + ": is damaged: a value without its case or name");
      put(campaign.cases[row->second], column->second, rows);
    }
  };
  spread("SELECT number, path, value FROM inputs", positions(campaign.paths), [](CampaignCase& one, std::size_t k, Statement& row) { one.inputs[k] = row.text(2); });
  spread("SELECT number, watched, value FROM results", positions(campaign.watch), [](CampaignCase& one, std::size_t k, Statement& row) { one.watched[k] = row.number(2); });
  if (std::to_string(campaign.cases.size()) != fact(database, "case_count")) throw LedgerTrouble(LedgerTrouble::damaged, database.path() + ": is damaged: cases are missing");
}

}  // namespace

struct Ledger::Parts {
  LedgerDatabase database;
  Parts(const std::string& path, LedgerDatabase::Way way) : database(path, way) {}
};

void Ledger::create(const std::string& path, const CampaignResult& campaign, const LedgerTerms& terms) {
  const std::string unready = path + ".unready";
  std::error_code error;
  files::remove(unready, error);
  files::remove(unready + "-journal", error);
  try {
    LedgerDatabase database(unready, LedgerDatabase::create);
    database.run("PRAGMA synchronous = FULL");
    database.run(fmt::format("PRAGMA application_id = {}; PRAGMA user_version = {}", application, ledger_format));
    LedgerTransaction transaction(database);
    database.run(schema);
    if (campaign.paths.size() + campaign.watch.size() <= widest_view) database.run(overview(campaign));
    write_facts(database, campaign, terms);
    write_cases(database, campaign);
    transaction.commit();
  } catch (const LedgerTrouble&) {
    files::remove(unready, error);
    files::remove(unready + "-journal", error);
    throw;
  }
  // A killed campaign's log may lie beside a ledger that was taken away since; it must not be read into the new one.
  for (const char* left : {"-wal", "-shm", "-journal"}) files::remove(path + left, error);
  files::rename(unready, path, error);
  if (error) throw LedgerTrouble(LedgerTrouble::machine, fmt::format("{}: {}", path, error.message()));
}

Ledger::Ledger(const std::string& path, bool to_write) : parts_(std::make_unique<Parts>(path, to_write ? LedgerDatabase::write : LedgerDatabase::read)) {
  check_ledger(parts_->database);
  if (!to_write) return;
  parts_->database.text("PRAGMA journal_mode = WAL");
  parts_->database.run("PRAGMA synchronous = NORMAL");
}

Ledger::~Ledger() = default;

CampaignResult Ledger::contents() const {
  CampaignResult campaign;
  parts_->database.run("BEGIN");  // one moment of a ledger that is being written
  read_facts(parts_->database, campaign);
  read_cases(parts_->database, campaign);
  parts_->database.run("COMMIT");
  campaign.digest = campaign_digest(campaign);
  campaign.cautions = cautions_of(campaign.cases);
  return campaign;
}

LedgerTerms Ledger::terms() const {
  LedgerDatabase& database = parts_->database;
  return {fact(database, "results_format_version"), fact(database, "through_time") == "true", fact(database, "keep_results") == "true"};
}

std::map<std::pair<int, std::string>, std::string> Ledger::missing() const {
  std::map<std::pair<int, std::string>, std::string> found;
  Statement rows(parts_->database, "SELECT number, watched, missing FROM results WHERE missing != ''");
  while (rows.step()) found[{static_cast<int>(rows.integer(0)), rows.text(1)}] = rows.text(2);
  return found;
}

void Ledger::record(const CaseRecord& record) {
  LedgerDatabase& database = parts_->database;
  const CampaignCase& row = record.row;
  LedgerTransaction transaction(database);
  Statement(database, "UPDATE cases SET status = ?, reason = ?, reason_group = ?, seconds = ?, results_file = ?, cautions = ? WHERE number = ?")
      .bind(to_string(row.status)).bind(row.reason).bind(row.reason_group).bind(row.seconds).bind(row.results_file).bind(row.cautions).bind(static_cast<long long>(row.number)).step();
  Statement(database, "DELETE FROM results WHERE number = ?").bind(static_cast<long long>(row.number)).step();
  Statement watched(database, "SELECT name FROM watched ORDER BY position");
  Statement result(database, "INSERT INTO results VALUES(?, ?, ?, ?)");
  for (std::size_t k = 0; watched.step(); ++k) {
    check(k < row.watched.size() && k < record.missing.size(), "a case without all of its watched values");
    result.bind(static_cast<long long>(row.number)).bind(watched.text(0)).bind(row.watched[k]).bind(record.missing[k]).step();
  }
  transaction.commit();
}

void Ledger::wait_again(const std::set<CaseStatus>& statuses) {
  LedgerDatabase& database = parts_->database;
  LedgerTransaction transaction(database);
  for (const CaseStatus status : statuses) {
    const std::string word = to_string(status);
    Statement(database, "DELETE FROM results WHERE number IN (SELECT number FROM cases WHERE status = ?)").bind(word).step();
    Statement(database, "UPDATE cases SET status = 'waiting', reason = '', reason_group = '', seconds = 0, results_file = '', cautions = '' WHERE status = ?").bind(word).step();
  }
  transaction.commit();
}

void Ledger::wait_again(const std::vector<int>& numbers) {
  LedgerTransaction transaction(parts_->database);
  Statement results(parts_->database, "DELETE FROM results WHERE number = ?");
  Statement cases(parts_->database,
                  "UPDATE cases SET status = 'waiting', reason = '', reason_group = '', seconds = 0, results_file = '', cautions = '' WHERE number = ?");
  for (const int number : numbers) {
    results.bind(static_cast<long long>(number)).step();
    cases.bind(static_cast<long long>(number)).step();
  }
  transaction.commit();
}

void Ledger::set_watched(const std::vector<std::string>& units, const std::vector<std::string>& meanings) {
  LedgerTransaction transaction(parts_->database);
  Statement update(parts_->database, "UPDATE watched SET unit = ?, meaning = ? WHERE position = ?");
  for (std::size_t k = 0; k < units.size(); ++k) update.bind(units[k]).bind(meanings[k]).bind(static_cast<long long>(k + 1)).step();
  transaction.commit();
}

void Ledger::set_facts(const CampaignResult& campaign) {
  LedgerTransaction transaction(parts_->database);
  write_changing_facts(parts_->database, campaign);
  transaction.commit();
}

void Ledger::set_digest(const std::string& digest) { set_fact(parts_->database, "digest", digest); }

void Ledger::close() {
  try {
    parts_->database.text("PRAGMA journal_mode = DELETE");
  } catch (const LedgerTrouble& trouble) {  // somebody reads it: then the next campaign on it does this
    if (trouble.kind() != LedgerTrouble::locked) throw;
  }
}

std::optional<CampaignResult> read_ledger(const std::string& path, std::string& fault) {
  try {
    return Ledger(path, false).contents();
  } catch (const LedgerTrouble& trouble) {
    fault = trouble.what();
    return std::nullopt;
  }
}

}  // namespace leat
