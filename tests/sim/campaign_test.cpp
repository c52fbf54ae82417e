// Campaigns of toy cases: order, isolation, kills, resuming, shards and their merging.
#include <gtest/gtest.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <chrono>
#include <cmath>
#include <filesystem>
#include <fstream>

#include "sim/study/ledger_lock.hpp"
#include "tests/support/toy_campaign.hpp"

namespace leat {
namespace {

using namespace test;
namespace files = std::filesystem;

CampaignOutcome run(const CampaignSpec& spec, const CampaignSettings& settings) { return run_campaign(spec, toy_work(), settings); }

// A campaign run to its end in a folder of its own.
CampaignResult whole(const CampaignSpec& spec, int workers) {
  const ToyFolder folder;
  const CampaignOutcome outcome = run(spec, toy_settings(folder.path("toy.ledger"), workers));
  EXPECT_EQ(outcome.ending, CampaignOutcome::finished) << outcome.trouble;
  return contents(folder.path("toy.ledger"));
}

TEST(CampaignCases, LastInputVariesFastestWithinListedCases) {
  CampaignSpec spec = toy_spec({"1", "2"}, {"5", "6", "7"});
  ASSERT_EQ(case_count(spec), 6);
  EXPECT_EQ(inputs_of(spec, 2), (Inputs{{"a.first", "1"}, {"b.second", "6"}}));
  EXPECT_EQ(inputs_of(spec, 4), (Inputs{{"a.first", "2"}, {"b.second", "5"}}));
  spec.listed = {{{"c", "x"}}, {{"c", "y"}}};
  ASSERT_EQ(case_count(spec), 12);
  EXPECT_EQ(varied_paths(spec), (std::vector<std::string>{"c", "a.first", "b.second"}));
  EXPECT_EQ(inputs_of(spec, 7), (Inputs{{"c", "y"}, {"a.first", "1"}, {"b.second", "5"}}));
  spec.grid.clear();
  EXPECT_EQ(inputs_of(spec, 2), (Inputs{{"c", "y"}}));
}

TEST(CampaignCases, HashHoldsAllThatDecidesTheResult) {
  const std::vector<std::string> watch = {"recovery.Ag"}, other = {"recovery.Cu"};
  const std::string hash = case_hash("text", {"leat 1", "2", true, watch});
  EXPECT_EQ(hash.size(), 32u);
  EXPECT_EQ(hash, case_hash("text", {"leat 1", "2", true, watch}));
  EXPECT_NE(hash, case_hash("texts", {"leat 1", "2", true, watch}));
  EXPECT_NE(hash, case_hash("text", {"leat 2", "2", true, watch}));
  EXPECT_NE(hash, case_hash("text", {"leat 1", "3", true, watch}));
  EXPECT_NE(hash, case_hash("text", {"leat 1", "2", false, watch}));
  EXPECT_NE(hash, case_hash("text", {"leat 1", "2", true, other}));
}

TEST(CampaignCases, ReasonsGroupWithoutTheCasesNumbers) {
  EXPECT_EQ(reason_group("tank.yaml:14:21 circuit.L.1: 6 kg is not a time"), "tank.yaml:#:# circuit.L.1: # kg is not a time");
  EXPECT_EQ(reason_group("Cu(NH3)4^2+ off by -1.5e-09 after 31 sweeps"), "Cu(NH3)4^2+ off by # after # sweeps");
  EXPECT_EQ(reason_group("took longer than 60 s"), "took longer than # s");
  EXPECT_EQ(reason_group("12"), "#");
}

TEST(CampaignCases, ShardsAreWritten) {
  EXPECT_EQ(read_shard("2/3")->text(), "2/3");
  EXPECT_EQ(read_shard("1/1")->text(), "");
  for (const char* wrong : {"", "2", "0/3", "4/3", "2/0", "-1/3", "2/3 ", "a/b", "1/2/3"}) EXPECT_FALSE(read_shard(wrong)) << wrong;
}

TEST(Campaign, EveryCaseHasItsRowInOrder) {
  const CampaignResult result = whole(toy_spec(numbers(6), numbers(5)), 3);
  ASSERT_EQ(result.cases.size(), 30u);
  EXPECT_EQ(result.watch_units, (std::vector<std::string>{"m3", "1"}));
  EXPECT_EQ(result.watch_meanings[1], "product by seven");
  EXPECT_EQ(result.path_units, (std::vector<std::string>{"m3/h", ""}));
  for (int k = 0; k < 30; ++k) {
    const CampaignCase& one = result.cases[k];
    EXPECT_EQ(one.number, k + 1);
    EXPECT_EQ(one.status, CaseStatus::done);
    EXPECT_EQ(one.inputs, (std::vector<std::string>{std::to_string(k / 5 + 1), std::to_string(k % 5 + 1)}));
    EXPECT_EQ(one.watched, (std::vector<double>{k / 5 + 1. + k % 5 + 1., (k / 5 + 1) * (k % 5 + 1.) / 7}));
    EXPECT_EQ(one.results_file, "toy.cases/" + results_file_name(k + 1));
  }
}

TEST(Campaign, DigestIsOfTheRowsNotOfTheWorkers) {
  const CampaignSpec spec = toy_spec(numbers(8), {"1", "2", "slow", "fault", "unsolved"});
  const std::string one = whole(spec, 1).digest;
  EXPECT_EQ(one.size(), 32u);
  EXPECT_EQ(one, whole(spec, 3).digest);
  EXPECT_NE(one, whole(toy_spec(numbers(8), {"1", "3", "slow", "fault", "unsolved"}), 3).digest);
}

TEST(Campaign, WhatACaseDoesStaysItsOwn) {
  CampaignSpec spec = toy_spec({"1", "2"}, {"1", "crash", "abort", "exit", "throw", "hang", "fault", "unsolved", "hungry", "bare", "3"});
  spec.time_limit = 0.5;
  const CampaignResult result = whole(spec, 2);
  const auto expect = [&](int number, CaseStatus status, const std::string& reason) {
    for (const CampaignCase& one : {result.cases[number - 1], result.cases[number + 10]}) {
      EXPECT_EQ(to_string(one.status), to_string(status)) << number;
      EXPECT_EQ(one.reason, reason);
      EXPECT_EQ(one.results_file.empty(), status != CaseStatus::done);
      if (status != CaseStatus::done) { EXPECT_TRUE(std::isnan(one.watched[0])); }
    }
  };
  expect(1, CaseStatus::done, "");
  expect(2, CaseStatus::crashed, "its process was ended by signal 11 (Segmentation fault)");
  expect(3, CaseStatus::crashed, "its process was ended by signal 6 (Aborted)");
  expect(4, CaseStatus::crashed, "its process ended by itself with exit code 3");
  expect(5, CaseStatus::crashed, "a fault of leat itself: case 7 went wrong");
  expect(6, CaseStatus::timed_out, "took longer than 0.5 s");
  expect(7, CaseStatus::input_fault, "base.yaml:14:21 a.first: 6 kg is not a time");
  expect(8, CaseStatus::not_solved, "no steady state after 31 sweeps");
  expect(9, CaseStatus::crashed, "out of memory");
  expect(10, CaseStatus::done, "");
  expect(11, CaseStatus::done, "");
  EXPECT_EQ(result.cases[7].reason_group, "no steady state after # sweeps");
  EXPECT_TRUE(std::isnan(result.cases[9].watched[1]));
  EXPECT_FALSE(std::isnan(result.cases[9].watched[0]));
}

TEST(Campaign, UnknownNamesAreFaultsBeforeAnythingIsWritten) {
  const ToyFolder folder;
  CampaignSpec spec = toy_spec({"bare"}, numbers(2));
  spec.base.text = "1 bare ";
  const CampaignOutcome outcome = run(spec, toy_settings(folder.path("deep/toy.ledger")));
  EXPECT_EQ(outcome.ending, CampaignOutcome::refused);
  ASSERT_EQ(outcome.faults.faults().size(), 1u);
  EXPECT_EQ(to_string(outcome.faults.faults()[0]), "toy.yaml:5:14 watch[1]: has no product; did you mean 'sum'?");
  EXPECT_TRUE(files::is_empty(folder.path("")));
}

// A name that the base case has not and a case has is a name.
TEST(Campaign, NamesOfSomeCasesAreNoFaults) {
  const ToyFolder folder;
  CampaignSpec spec = toy_spec(numbers(3), numbers(2));
  spec.base.text = "1 bare ";
  EXPECT_EQ(run(spec, toy_settings(folder.path("toy.ledger"))).ending, CampaignOutcome::finished);
}

// The base case crashes: names are taken from the first case that is solved.
TEST(Campaign, NamesComeFromACaseWhereTheBaseFails) {
  CampaignSpec spec = toy_spec({"unsolved", "3"}, numbers(2));
  spec.base.text = "1 crash ";
  const CampaignResult result = whole(spec, 2);
  EXPECT_EQ(result.watch_units[0], "m3");
  EXPECT_EQ(result.cases[3].watched[0], 5);
  const CampaignResult none = whole([] {
    CampaignSpec failing = toy_spec({"unsolved"}, numbers(2));
    failing.base.text = "1 fault ";
    return failing;
  }(), 2);
  EXPECT_EQ(none.watch_units[0], "");
  EXPECT_EQ(none.cases[1].reason, "no steady state after 31 sweeps");
}

TEST(Campaign, StopsAndGoesOn) {
  const ToyFolder folder;
  const CampaignSpec spec = toy_spec(numbers(6), {"1", "slow"});
  CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  int seen = 0;
  settings.progress = [&](const CampaignProgress& progress) { seen = progress.finished; };
  settings.stop = [&] { return seen >= 5; };
  const CampaignOutcome first = run(spec, settings);
  EXPECT_EQ(first.ending, CampaignOutcome::stopped);
  const CampaignResult half = contents(settings.ledger);
  const auto waiting = std::count_if(half.cases.begin(), half.cases.end(), [](const CampaignCase& one) { return one.status == CaseStatus::waiting; });
  EXPECT_EQ(waiting, 12 - first.solved_now);
  EXPECT_GT(waiting, 0);
  settings.stop = nullptr;
  const CampaignOutcome second = run(spec, settings);
  EXPECT_EQ(second.ending, CampaignOutcome::finished) << second.trouble;
  EXPECT_EQ(first.solved_now + second.solved_now, 12);
  EXPECT_EQ(contents(settings.ledger).digest, whole(spec, 1).digest);
  EXPECT_EQ(run(spec, settings).solved_now, 0);
}

TEST(Campaign, AStopEndsACaseThatHangs) {
  const ToyFolder folder;
  CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  settings.grace = 0.3;
  settings.stop = [&, start = std::chrono::steady_clock::now()] { return std::chrono::steady_clock::now() - start > std::chrono::milliseconds(700); };
  const CampaignOutcome outcome = run(toy_spec({"hang", "2"}, numbers(3)), settings);
  EXPECT_EQ(outcome.ending, CampaignOutcome::stopped);
  EXPECT_LT(outcome.seconds, 5);
  EXPECT_EQ(contents(settings.ledger).cases[0].status, CaseStatus::waiting);
}

// The solve callback ends its own process as an operator would, a given number of times for one case.
CampaignWork killed_work(const std::string& counter, int times, int signal_number) {
  CampaignWork work = toy_work();
  work.solve = [=, solve = work.solve](const std::string& text, const std::string& file) {
    if (text == "2 2 " && !file.empty()) {
      const auto before = files::exists(counter) ? files::file_size(counter) : 0;
      std::ofstream(counter, std::ios::app) << "x";
      if (static_cast<int>(before) < times) raise(signal_number);
    }
    return solve(text, file);
  };
  return work;
}

TEST(Campaign, AWorkerKilledFromOutsideGetsItsCaseDoneOnceMore) {
  const CampaignSpec spec = toy_spec(numbers(3), numbers(3));
  for (const int signal_number : {SIGKILL, SIGTERM}) {
    const ToyFolder folder;
    const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
    EXPECT_EQ(run_campaign(spec, killed_work(folder.path("count"), 1, signal_number), settings).ending, CampaignOutcome::finished);
    EXPECT_EQ(contents(settings.ledger).digest, whole(spec, 1).digest);
  }
  const ToyFolder folder;
  CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  const CampaignWork work = killed_work(folder.path("count"), 2, SIGKILL);
  EXPECT_EQ(run_campaign(spec, work, settings).ending, CampaignOutcome::finished);
  EXPECT_EQ(contents(settings.ledger).cases[4].reason, "its process was ended twice by signal 9 (Killed)");
  EXPECT_EQ(run_campaign(spec, work, settings).solved_now, 0);
  settings.retry = true;
  EXPECT_EQ(run_campaign(spec, work, settings).solved_now, 1);
  EXPECT_EQ(contents(settings.ledger).digest, whole(spec, 1).digest);
}

TEST(Campaign, TroubleWithTheMachineIsTriedAgainNextTime) {
  const ToyFolder folder;
  const CampaignSpec spec = toy_spec({"1", "trouble", "3"}, numbers(2));
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"), 1);
  const CampaignOutcome outcome = run(spec, settings);
  EXPECT_EQ(outcome.ending, CampaignOutcome::machine_trouble);
  EXPECT_EQ(outcome.solved_now, 6);
  EXPECT_EQ(contents(settings.ledger).cases[2].status, CaseStatus::machine_trouble);
  EXPECT_EQ(run(spec, settings).solved_now, 2);
}

TEST(Campaign, ManyTroublesOneAfterTheOtherStopIt) {
  const ToyFolder folder;
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"), 1);
  const CampaignOutcome outcome = run(toy_spec({"1", "trouble"}, numbers(30)), settings);
  EXPECT_EQ(outcome.ending, CampaignOutcome::machine_trouble);
  EXPECT_LT(outcome.solved_now, 40);
  EXPECT_EQ(contents(settings.ledger).cases[59].status, CaseStatus::waiting);
}

TEST(Campaign, TheLedgerOfAnotherCampaignIsLeftAlone) {
  const ToyFolder folder;
  const CampaignSpec spec = toy_spec(numbers(3), numbers(2));
  CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  ASSERT_EQ(run(spec, settings).ending, CampaignOutcome::finished);
  const auto refused = [&](const CampaignSpec& other, const CampaignSettings& with, const std::string& piece) {
    const CampaignOutcome outcome = run(other, with);
    EXPECT_EQ(outcome.ending, CampaignOutcome::refused);
    EXPECT_NE(outcome.trouble.find(piece), std::string::npos) << outcome.trouble;
    EXPECT_NE(outcome.trouble.find("--out"), std::string::npos) << outcome.trouble;
  };
  CampaignSpec other = toy_spec({"1", "2", "4"}, numbers(2));
  refused(other, settings, "case 5 has a.first = 3 in the ledger, 4 now");
  refused(toy_spec(numbers(4), numbers(2)), settings, "6 cases in the ledger, 8 now");
  other = spec;
  other.watch[1] = "sum2";
  refused(other, settings, "watch is sum, product in the ledger, sum, sum2 now");
  other = spec;
  other.base.text += "# changed";
  refused(other, settings, "the text of base.yaml has changed");
  other = spec;
  other.through_time = false;
  refused(other, settings, "through_time is true in the ledger, false now");
  CampaignSettings newer = settings;
  newer.program = "leat toy 2";
  refused(spec, newer, "the program is leat toy in the ledger, leat toy 2 now");
  other = spec;  // what decides nothing may change
  other.title = "toy, other title";
  other.text += "# a comment\n";
  other.time_limit = 7;
  EXPECT_EQ(run(other, settings).ending, CampaignOutcome::finished);
  EXPECT_EQ(contents(settings.ledger).title, "toy, other title");
}

TEST(Campaign, OneAtATimeOnALedger) {
  const ToyFolder folder;
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  const CampaignSpec spec = toy_spec(numbers(2), numbers(2));
  {
    const LedgerLock lock(settings.ledger);
    const CampaignOutcome outcome = run(spec, settings);
    EXPECT_EQ(outcome.ending, CampaignOutcome::machine_trouble);
    EXPECT_NE(outcome.trouble.find("another campaign is at work on it (process "), std::string::npos) << outcome.trouble;
  }
  std::ofstream(settings.ledger + ".lock") << "left behind";
  EXPECT_EQ(run(spec, settings).ending, CampaignOutcome::finished);
  EXPECT_FALSE(files::exists(settings.ledger + ".lock"));
}

TEST(Campaign, ShardsPutTogetherAreTheWhole) {
  const ToyFolder folder;
  const CampaignSpec spec = toy_spec(numbers(5), {"1", "fault", "bare", "crash"});
  std::vector<std::string> shards;
  for (int k = 1; k <= 3; ++k) {
    CampaignSettings settings = toy_settings(folder.path("part" + std::to_string(k) + "/toy.ledger"));
    settings.shard = {k, 3};
    ASSERT_EQ(run(spec, settings).ending, CampaignOutcome::finished);
    shards.push_back(settings.ledger);
  }
  EXPECT_EQ(contents(shards[1]).shard, "2/3");
  EXPECT_EQ(contents(shards[1]).cases.size(), 7u);
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  const auto merge = [&](const std::vector<std::string>& of) { return merge_campaign(spec, toy_work(), settings, of); };
  EXPECT_EQ(merge({shards[0], shards[2]}).ending, CampaignOutcome::finished);
  EXPECT_EQ(contents(settings.ledger).cases[1].status, CaseStatus::waiting);
  const CampaignOutcome all = merge(shards);
  EXPECT_EQ(all.ending, CampaignOutcome::finished) << all.trouble;
  const CampaignResult merged = contents(settings.ledger);
  EXPECT_EQ(merged.digest, whole(spec, 2).digest);
  EXPECT_EQ(merged.watch_units[0], "m3");
  EXPECT_EQ(merged.cases[4].results_file, "part2/toy.cases/000005.h5");
  EXPECT_TRUE(files::exists(folder.path(merged.cases[4].results_file)));
  EXPECT_EQ(run(spec, settings).solved_now, 0);
}

TEST(Campaign, WhatMergedShardsLackIsDoneLater) {
  const ToyFolder folder;
  const CampaignSpec spec = toy_spec(numbers(4), numbers(2));
  CampaignSettings part = toy_settings(folder.path("toy.1-of-2.ledger"));
  part.shard = {1, 2};
  ASSERT_EQ(run(spec, part).ending, CampaignOutcome::finished);
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  ASSERT_EQ(merge_campaign(spec, toy_work(), settings, {part.ledger}).ending, CampaignOutcome::finished);
  EXPECT_EQ(run(spec, settings).solved_now, 4);
  EXPECT_EQ(contents(settings.ledger).digest, whole(spec, 1).digest);
}

TEST(Campaign, ConflictingAndForeignLedgersAreNotMerged) {
  const ToyFolder folder;
  const CampaignSpec spec = toy_spec(numbers(2), numbers(2));
  const CampaignSettings one = toy_settings(folder.path("one.ledger")), two = toy_settings(folder.path("two.ledger"));
  ASSERT_EQ(run(spec, one).ending, CampaignOutcome::finished);
  CampaignWork other = toy_work();
  other.solve = [solve = other.solve](const std::string& text, const std::string& file) {
    CaseAnswer answer = solve(text, file);
    if (text == "2 1 ") answer.watched[0].value += 1e-15;
    return answer;
  };
  ASSERT_EQ(run_campaign(spec, other, two).ending, CampaignOutcome::finished);
  const CampaignSettings target = toy_settings(folder.path("toy.ledger"));
  CampaignOutcome outcome = merge_campaign(spec, toy_work(), target, {one.ledger, two.ledger});
  EXPECT_EQ(outcome.ending, CampaignOutcome::refused);
  EXPECT_NE(outcome.trouble.find("case 3 is told differently by"), std::string::npos) << outcome.trouble;
  EXPECT_NE(outcome.trouble.find("sum is 3 against 3.0000000000000009"), std::string::npos) << outcome.trouble;
  EXPECT_FALSE(files::exists(target.ledger));
  outcome = merge_campaign(toy_spec(numbers(2), {"1", "9"}), toy_work(), target, {one.ledger});
  EXPECT_EQ(outcome.ending, CampaignOutcome::refused);
  EXPECT_NE(outcome.trouble.find("case 2 has b.second = 2 in the ledger, 9 now"), std::string::npos) << outcome.trouble;
  EXPECT_EQ(merge_campaign(spec, toy_work(), target, {folder.path("none.ledger")}).ending, CampaignOutcome::machine_trouble);
}

// Workers die with the parent, also one that is killed, and so does the lock.
TEST(Campaign, AKilledParentLeavesNoWorkerAndNoLock) {
  const ToyFolder folder;
  const CampaignSettings settings = toy_settings(folder.path("toy.ledger"));
  const pid_t parent = fork();
  if (parent == 0) {
    setpgid(0, 0);
    run(toy_spec({"1", "hang"}, numbers(4)), settings);
    _exit(0);
  }
  for (int k = 0; k < 500 && !files::exists(settings.ledger); ++k) usleep(10000);
  usleep(300000);
  kill(parent, SIGKILL);
  int status = 0;
  waitpid(parent, &status, 0);
  int k = 0;
  for (; k < 500 && kill(-parent, 0) == 0; ++k) usleep(10000);  // until nobody of its group is left
  EXPECT_LT(k, 500);
  EXPECT_EQ(run(toy_spec({"1", "hang"}, numbers(4)), [&] {
              CampaignSettings stopping = settings;
              stopping.stop = [] { return true; };
              return stopping;
            }()).ending, CampaignOutcome::stopped);
}

}  // namespace
}  // namespace leat
