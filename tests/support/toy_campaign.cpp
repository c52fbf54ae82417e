#include "tests/support/toy_campaign.hpp"

#include <gtest/gtest.h>
#include <signal.h>
#include <sys/resource.h>
#include <unistd.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <stdexcept>
#include <system_error>

namespace leat::test {

namespace files = std::filesystem;

ToyFolder::ToyFolder() {
  std::string pattern = (files::temp_directory_path() / "leat_campaign_XXXXXX").string();
  if (mkdtemp(pattern.data()) == nullptr) throw std::runtime_error("no folder to test in");
  folder_ = pattern;
}

ToyFolder::~ToyFolder() {
  std::error_code unused;
  files::remove_all(folder_, unused);
}

std::vector<std::string> numbers(int count) {
  std::vector<std::string> list;
  for (int k = 1; k <= count; ++k) list.push_back(std::to_string(k));
  return list;
}

CampaignSpec toy_spec(const std::vector<std::string>& first, const std::vector<std::string>& second) {
  CampaignSpec spec;
  spec.title = "toy";
  spec.file = "toy.yaml";
  spec.text = "kind: campaign\n";
  spec.base.file = "base.yaml";
  spec.base.text = "1 1 ";
  spec.grid.resize(2);
  spec.grid[0].path = "a.first";
  spec.grid[0].values = first;
  spec.grid[0].unit = "m3/h";
  spec.grid[1].path = "b.second";
  spec.grid[1].values = second;
  spec.watch = {"sum", "product"};
  spec.watch_places = {{"toy.yaml", 5, 9, "watch[0]"}, {"toy.yaml", 5, 14, "watch[1]"}};
  spec.rank_by = "sum";
  spec.time_limit = 30;
  return spec;
}

namespace {

void set_no_core() {
  const struct rlimit none = {0, 0};
  setrlimit(RLIMIT_CORE, &none);
}

CaseAnswer no(CaseStatus status, const std::string& reason) {
  CaseAnswer answer;
  answer.status = status;
  answer.reason = reason;
  return answer;
}

// What the words do.
std::optional<CaseAnswer> misbehave(const std::string& word) {
  set_no_core();
  if (word == "crash") {
    signal(SIGSEGV, SIG_DFL);  // a sanitizer would make another end of it
    raise(SIGSEGV);
  }
  if (word == "abort") {
    signal(SIGABRT, SIG_DFL);
    std::abort();
  }
  if (word == "exit") std::exit(3);
  if (word == "throw") throw std::logic_error("case 7 went wrong");
  if (word == "hang")
    while (true) pause();
  if (word == "hungry") throw std::bad_alloc();
  if (word == "trouble") throw std::system_error(ENOSPC, std::generic_category(), "x.h5");
  if (word == "fault") return no(CaseStatus::input_fault, "base.yaml:14:21 a.first: 6 kg is not a time");
  if (word == "unsolved") return no(CaseStatus::not_solved, "no steady state after 31 sweeps");
  if (word == "slow") usleep(100000);
  return std::nullopt;
}

CaseAnswer solve(const std::string& text, const std::string& file) {
  std::istringstream in(text);
  std::string word;
  std::vector<double> values;
  bool bare = false;
  while (in >> word) {
    if (auto answer = misbehave(word)) return *answer;
    bare = bare || word == "bare";
    values.push_back(std::atof(word.c_str()));
  }
  CaseAnswer answer;
  WatchedValue sum{values[0] + values[1], "m3", "sum of both", ""};
  WatchedValue product{values[0] * values[1] / 7, "1", "product by seven", ""};
  if (bare) product = {std::numeric_limits<double>::quiet_NaN(), "", "", "has no product; did you mean 'sum'?"};
  answer.watched = {sum, product};
  if (file.empty()) return answer;
  files::create_directories(files::path(file).parent_path());
  std::ofstream(file) << text;
  answer.file_written = true;
  return answer;
}

}  // namespace

CampaignWork toy_work() {
  CampaignWork work;
  work.text = [](const Inputs& inputs) {
    std::string text;
    for (const auto& [path, value] : inputs) text += value + " ";
    return text;
  };
  work.solve = solve;
  return work;
}

CampaignSettings toy_settings(const std::string& ledger, int workers) {
  CampaignSettings settings;
  settings.ledger = ledger;
  settings.program = "leat toy";
  settings.results_format = "2";
  settings.workers = workers;
  return settings;
}

CampaignResult contents(const std::string& ledger) {
  std::string fault;
  auto result = read_ledger(ledger, fault);
  EXPECT_TRUE(result) << fault;
  return result ? *result : CampaignResult{};
}

}  // namespace leat::test
