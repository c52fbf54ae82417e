// LedgerDatabase: an SQLite file and its statements in our words. Everything that goes wrong is a LedgerTrouble.
#pragma once

#include <memory>
#include <string>
#include <string_view>

#include "sim/study/ledger_trouble.hpp"

struct sqlite3;
struct sqlite3_stmt;

namespace leat {

class LedgerDatabase {
 public:
  enum Way { create, write, read };
  LedgerDatabase(const std::string& path, Way way);

  void run(const std::string& sql);               // without results
  long long number(const std::string& sql);       // the single number of its first row; 0 without rows
  std::string text(const std::string& sql);
  const std::string& path() const { return path_; }
  [[noreturn]] void fail(int code) const;          // SQLite's answer as a LedgerTrouble

  // One statement, used again and again: bind all, then step.
  class Statement {
   public:
    Statement(LedgerDatabase& database, const std::string& sql);
    Statement& bind(std::string_view text);
    Statement& bind(long long number);
    Statement& bind(double number);                // NaN goes in as NULL
    bool step();                                   // whether there is a row; without one the statement is ready for the next use
    std::string text(int column) const;
    long long integer(int column) const;
    double number(int column) const;               // NULL is NaN

   private:
    struct End {
      void operator()(sqlite3_stmt* statement) const;
    };
    void judge(int code);

    LedgerDatabase& database_;
    std::unique_ptr<sqlite3_stmt, End> statement_;
    int bound_ = 0;
  };

 private:
  struct Close {
    void operator()(sqlite3* database) const;
  };
  std::string path_;
  std::unique_ptr<sqlite3, Close> database_;
};

// All or nothing: undone unless committed.
class LedgerTransaction {
 public:
  explicit LedgerTransaction(LedgerDatabase& database);
  ~LedgerTransaction();
  void commit();

 private:
  LedgerDatabase& database_;
  bool open_ = true;
};

}  // namespace leat
