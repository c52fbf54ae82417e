// The ledger as a file: read back, told apart from other files, damaged, locked, written by nobody.
#include <gtest/gtest.h>

#include <cmath>
#include <cstdlib>
#include <filesystem>
#include <fstream>

#include "sim/study/campaign_start.hpp"
#include "sim/study/ledger_database.hpp"
#include "sim/study/ledger_lock.hpp"
#include "tests/support/toy_campaign.hpp"

namespace leat {
namespace {

using namespace test;
namespace files = std::filesystem;

std::string fault_of(const std::string& path) {
  std::string fault;
  EXPECT_FALSE(read_ledger(path, fault)) << path;
  return fault;
}

// A ledger of 200 cases, all waiting.
std::string waiting_ledger(const ToyFolder& folder, int first = 20) {
  const CampaignSpec spec = toy_spec(numbers(first), numbers(10));
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  Ledger::create(settings.ledger, waiting_campaign(spec, toy_work(), settings), terms_of(spec, settings));
  return settings.ledger;
}

TEST(Ledger, RowsComeBackToTheBit) {
  const ToyFolder folder;
  const std::string path = waiting_ledger(folder);
  const double numbers[] = {0.1, -0.0, 1e-310, std::nan(""), 1.0 / 3, INFINITY, 123456789};
  {
    Ledger ledger(path);
    int number = 1;
    for (const double value : numbers) {
      CaseRecord record;
      record.row.number = number++;
      record.row.status = CaseStatus::done;
      record.row.seconds = 0.25;
      record.row.watched = {value, 2 * value};
      record.missing = {"", "it's \"missing\""};
      ledger.record(record);
      ledger.record(record);  // twice is once
    }
    EXPECT_EQ((ledger.missing().at({2, "product"})), "it's \"missing\"");
    const std::string live = contents(path).digest;  // read while it is being written
    ledger.close();
    EXPECT_EQ(live, contents(path).digest);
  }
  EXPECT_FALSE(files::exists(path + "-wal"));
  const CampaignResult back = contents(path);
  ASSERT_EQ(back.cases.size(), 200u);
  for (std::size_t k = 0; k < std::size(numbers); ++k)
    if (!std::isnan(numbers[k])) { EXPECT_EQ(back.cases[k].watched[0], numbers[k]); }
  EXPECT_TRUE(std::isnan(back.cases[3].watched[0]));
  EXPECT_EQ(back.cases[7].status, CaseStatus::waiting);
  EXPECT_EQ(back.cases[10].inputs, (std::vector<std::string>{"2", "1"}));
}

TEST(Ledger, TheShellSeesInputsAndResultsSideBySide) {
  const ToyFolder folder;
  CampaignSpec spec = toy_spec({"1"}, {"2"});
  spec.grid[0].path = "it's \"odd\"";
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  ASSERT_EQ(run_campaign(spec, toy_work(), settings).ending, CampaignOutcome::finished);
  LedgerDatabase database(settings.ledger, LedgerDatabase::read);
  EXPECT_EQ(database.text("SELECT \"it's \"\"odd\"\"\" || ' ' || \"b.second\" || ' ' || sum FROM overview"), "1 2 3.0");
}

TEST(Ledger, OtherFilesAreToldApart) {
  const ToyFolder folder;
  const std::string path = folder.path("x.ledger");
  EXPECT_EQ(fault_of(path), path + ": is not there");
  std::ofstream(path) << "leat: 1\nkind: campaign\n" << std::string(5000, '#');
  EXPECT_EQ(fault_of(path), path + ": is not a ledger");
  std::ofstream(path, std::ios::trunc).close();
  EXPECT_EQ(fault_of(path), path + ": is not a ledger");
  files::remove(path);
  LedgerDatabase(path, LedgerDatabase::create).run("CREATE TABLE t(x)");
  EXPECT_EQ(fault_of(path), path + ": is an SQLite file, but not a ledger");
  files::remove(path);
  files::create_directory(path);
  EXPECT_NE(fault_of(path), "");
  const std::string newer = waiting_ledger(folder);
  LedgerDatabase(newer, LedgerDatabase::write).run("PRAGMA user_version = 99");
  EXPECT_EQ(fault_of(newer), newer + ": was written by a newer leat (ledger format 99; this one knows 1)");
}

TEST(Ledger, DamageIsTold) {
  const ToyFolder folder;
  const std::string path = waiting_ledger(folder), whole = folder.path("whole");
  files::copy_file(path, whole);
  const auto size = files::file_size(whole);
  for (const auto length : {100ul, 3000ul, static_cast<unsigned long>(size / 2), static_cast<unsigned long>(size - 4096)}) {
    files::copy_file(whole, path, files::copy_options::overwrite_existing);
    files::resize_file(path, length);
    EXPECT_NE(fault_of(path).find("is damaged"), std::string::npos) << length << ": " << fault_of(path);
  }
  for (unsigned long at = 4096; at + 4096 <= size; at += 4096) {  // a page of nothing
    files::copy_file(whole, path, files::copy_options::overwrite_existing);
    std::fstream file(path, std::ios::in | std::ios::out | std::ios::binary);
    file.seekp(static_cast<std::streamoff>(at)).write(std::string(4096, '\0').data(), 4096);
    file.close();
    EXPECT_NE(fault_of(path).find("is damaged"), std::string::npos) << at;
  }
  const CampaignOutcome outcome = run_campaign(toy_spec(numbers(20), numbers(10)), toy_work(), toy_settings(path));
  EXPECT_EQ(outcome.ending, CampaignOutcome::machine_trouble);
  EXPECT_NE(outcome.trouble.find("is damaged"), std::string::npos) << outcome.trouble;
  files::copy_file(whole, path, files::copy_options::overwrite_existing);
  LedgerDatabase(path, LedgerDatabase::write).run("DELETE FROM cases WHERE number = 200; DELETE FROM inputs WHERE number = 200");
  EXPECT_EQ(fault_of(path), path + ": is damaged: cases are missing");
}

TEST(Ledger, ALockedOneIsToldSo) {
  const ToyFolder folder;
  const std::string path = waiting_ledger(folder);
  LedgerDatabase other(path, LedgerDatabase::write);
  other.run("BEGIN EXCLUSIVE");
  EXPECT_EQ(fault_of(path), path + ": is locked by another program");
}

// What a killed program leaves behind: the log beside the file, and halves of a ledger under another name.
TEST(Ledger, ALogLeftBehindIsReadToo) {
  const ToyFolder folder;
  const std::string path = waiting_ledger(folder), copy = folder.path("copy.ledger");
  Ledger ledger(path);
  CaseRecord record;
  record.row.number = 3;
  record.row.status = CaseStatus::not_solved;
  record.row.reason = "why";
  record.row.watched = {1, 2};
  record.missing = {"", ""};
  ledger.record(record);
  files::copy_file(path, copy);  // as a kill leaves them
  files::copy_file(path + "-wal", copy + "-wal");
  EXPECT_EQ(contents(copy).cases[2].reason, "why");
  files::copy_file(path + "-wal", copy + "-wal", files::copy_options::overwrite_existing);
  files::resize_file(copy + "-wal", files::file_size(copy + "-wal") - 100);  // the last row torn: it waits again
  EXPECT_EQ(contents(copy).cases[2].status, CaseStatus::waiting);
}

}  // namespace
}  // namespace leat
