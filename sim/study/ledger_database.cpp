#include "sim/study/ledger_database.hpp"

#include <fmt/format.h>
#include <sqlite3.h>

#include <cmath>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <limits>

namespace leat {
namespace {

constexpr int patience = 5000;  // for somebody who reads or writes the file at this moment [ms]

bool begins_as_sqlite(const std::string& path) {
  char head[16] = {};
  std::ifstream(path, std::ios::binary).read(head, sizeof head);
  return std::memcmp(head, "SQLite format 3", 16) == 0;
}

std::string as_uri(const std::string& path, const char* query) {
  std::string uri = "file:";
  for (const char sign : path) uri += sign == '%' || sign == '?' || sign == '#' ? fmt::format("%{:02x}", static_cast<unsigned char>(sign)) : std::string(1, sign);
  return uri + query;
}

}  // namespace

void LedgerDatabase::Close::operator()(sqlite3* database) const { sqlite3_close_v2(database); }
void LedgerDatabase::Statement::End::operator()(sqlite3_stmt* statement) const { sqlite3_finalize(statement); }

LedgerDatabase::LedgerDatabase(const std::string& path, Way way) : path_(path) {
  const auto open = [&](const std::string& name, int flags) {
    sqlite3* database = nullptr;
    const int code = sqlite3_open_v2(name.c_str(), &database, flags, nullptr);
    database_.reset(database);
    if (code != SQLITE_OK) fail(code);
    sqlite3_extended_result_codes(database, 1);
    sqlite3_busy_timeout(database, patience);
  };
  if (way != create && !std::filesystem::exists(path)) throw LedgerTrouble(LedgerTrouble::machine, path + ": is not there");
  open(path, way == create ? SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE : way == write ? SQLITE_OPEN_READWRITE : SQLITE_OPEN_READONLY);
  if (way != read) return;
  try {
    number("SELECT count(*) FROM sqlite_master");
  } catch (const LedgerTrouble& trouble) {  // in a folder that nobody may write in: as a file that will not change
    if (trouble.kind() != LedgerTrouble::machine || std::filesystem::exists(path + "-wal")) throw;
    open(as_uri(path, "?immutable=1"), SQLITE_OPEN_READONLY | SQLITE_OPEN_URI);
  }
}

void LedgerDatabase::fail(int code) const {
  const std::string said = database_ ? sqlite3_errmsg(database_.get()) : sqlite3_errstr(code);
  const int reason = database_ ? sqlite3_system_errno(database_.get()) : 0;
  const std::string why = reason != 0 ? fmt::format("{} ({})", said, std::strerror(reason)) : said;
  switch (code & 0xff) {
    case SQLITE_NOTADB:
      if (!begins_as_sqlite(path_)) throw LedgerTrouble(LedgerTrouble::not_a_ledger, path_ + ": is not a ledger");
      [[fallthrough]];
    case SQLITE_CORRUPT:
      throw LedgerTrouble(LedgerTrouble::damaged, fmt::format("{}: is damaged: {}", path_, why));
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
      throw LedgerTrouble(LedgerTrouble::locked, path_ + ": is locked by another program");
    case SQLITE_ERROR:  // a table or column that every ledger has
      throw LedgerTrouble(LedgerTrouble::damaged, fmt::format("{}: is damaged: {}", path_, why));
    default:
      throw LedgerTrouble(LedgerTrouble::machine, fmt::format("{}: {}", path_, why));
  }
}

void LedgerDatabase::run(const std::string& sql) {
  const int code = sqlite3_exec(database_.get(), sql.c_str(), nullptr, nullptr, nullptr);
  if (code != SQLITE_OK) fail(code);
}

long long LedgerDatabase::number(const std::string& sql) {
  Statement statement(*this, sql);
  return statement.step() ? statement.integer(0) : 0;
}

std::string LedgerDatabase::text(const std::string& sql) {
  Statement statement(*this, sql);
  return statement.step() ? statement.text(0) : "";
}

LedgerDatabase::Statement::Statement(LedgerDatabase& database, const std::string& sql) : database_(database) {
  sqlite3_stmt* statement = nullptr;
  const int code = sqlite3_prepare_v2(database.database_.get(), sql.c_str(), -1, &statement, nullptr);
  statement_.reset(statement);
  if (code != SQLITE_OK) database.fail(code);
}

void LedgerDatabase::Statement::judge(int code) {
  if (code != SQLITE_OK) database_.fail(code);
}

LedgerDatabase::Statement& LedgerDatabase::Statement::bind(std::string_view text) {
  judge(sqlite3_bind_text(statement_.get(), ++bound_, text.data(), static_cast<int>(text.size()), SQLITE_TRANSIENT));
  return *this;
}

LedgerDatabase::Statement& LedgerDatabase::Statement::bind(long long number) {
  judge(sqlite3_bind_int64(statement_.get(), ++bound_, number));
  return *this;
}

LedgerDatabase::Statement& LedgerDatabase::Statement::bind(double number) {
  judge(std::isnan(number) ? sqlite3_bind_null(statement_.get(), ++bound_) : sqlite3_bind_double(statement_.get(), ++bound_, number));
  return *this;
}

bool LedgerDatabase::Statement::step() {
  const int code = sqlite3_step(statement_.get());
  if (code == SQLITE_ROW) return true;
  bound_ = 0;
  const int again = sqlite3_reset(statement_.get());  // repeats what step failed with
  if (code != SQLITE_DONE) database_.fail(again != SQLITE_OK ? again : code);
  return false;
}

std::string LedgerDatabase::Statement::text(int column) const {
  const unsigned char* text = sqlite3_column_text(statement_.get(), column);
  if (text == nullptr) return "";
  return {reinterpret_cast<const char*>(text), static_cast<std::size_t>(sqlite3_column_bytes(statement_.get(), column))};
}

long long LedgerDatabase::Statement::integer(int column) const { return sqlite3_column_int64(statement_.get(), column); }

double LedgerDatabase::Statement::number(int column) const {
  if (sqlite3_column_type(statement_.get(), column) == SQLITE_NULL) return std::numeric_limits<double>::quiet_NaN();
  return sqlite3_column_double(statement_.get(), column);
}

LedgerTransaction::LedgerTransaction(LedgerDatabase& database) : database_(database) { database_.run("BEGIN IMMEDIATE"); }

LedgerTransaction::~LedgerTransaction() {
  if (!open_) return;
  try {
    database_.run("ROLLBACK");
  } catch (const LedgerTrouble&) {  // SQLite has undone it already
  }
}

void LedgerTransaction::commit() {
  database_.run("COMMIT");
  open_ = false;
}

}  // namespace leat
