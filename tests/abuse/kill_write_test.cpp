// Kills a program while it writes results: under the name there is then either no file or a whole one.
#include <gtest/gtest.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <csignal>
#include <filesystem>
#include <random>
#include <thread>

#include "sim/results/hdf5_file.hpp"

namespace leat {
namespace {

namespace fs = std::filesystem;

constexpr std::size_t rows = 10'000;

// Every value tells the number of the round, so that a mixture of two rounds would show.
ResultSet round_of(int number) {
  ResultSet set;
  set.attributes = {{"round", std::to_string(number)}};
  set.axes = {{"time", "time", "h", {}, {}, true}, {"unit", "unit", "", {"L1", "L2", "L3", "L4"}, {}, false}};
  for (std::size_t i = 0; i < rows; ++i) set.axes[0].values.push_back(static_cast<double>(i));
  for (const char* name : {"volume", "density"})
    set.variables.push_back({name, name, "1", {"time", "unit"}, std::vector<double>(rows * 4, number)});
  set.texts = {{"input_text", "input", "", {std::string(100'000, 'x')}}};
  return set;
}

void expect_whole(const ResultSet& set) {
  ASSERT_EQ(set.attributes.size(), 1u);
  const double number = std::stod(set.attributes[0].second);
  ASSERT_EQ(set.variables.size(), 2u);
  for (const Variable& variable : set.variables) {
    ASSERT_EQ(variable.values.size(), rows * 4);
    ASSERT_TRUE(std::all_of(variable.values.begin(), variable.values.end(), [&](double v) { return v == number; }));
  }
  ASSERT_EQ(set.texts.at(0).values.at(0).size(), 100'000u);
}

// Never returns.
void write_for_ever(const std::string& path) {
  for (int number = 1;; ++number)
    if (!write_result_file(round_of(number), path).ok) ::_exit(1);
}

TEST(KillWrite, NameIsAbsentOrWhole) {
  std::string name = (fs::temp_directory_path() / "leat_kill_XXXXXX").string();
  ASSERT_NE(::mkdtemp(name.data()), nullptr);
  const std::string path = name + "/case.h5";
  std::mt19937 random(20240607);
  std::uniform_int_distribution<int> microseconds(2'000, 60'000);
  int present = 0, replaced = 0;

  for (int kill = 0; kill < 30; ++kill) {
    // In turn: no file yet, and one that the child replaces.
    if (kill % 3 == 0) fs::remove(path);
    else ASSERT_TRUE(write_result_file(round_of(0), path).ok);
    const pid_t child = ::fork();
    ASSERT_GE(child, 0);
    if (child == 0) write_for_ever(path);
    std::this_thread::sleep_for(std::chrono::microseconds(microseconds(random)));
    ::kill(child, SIGKILL);
    int status = 0;
    ASSERT_EQ(::waitpid(child, &status, 0), child);
    ASSERT_TRUE(WIFSIGNALED(status)) << "the child ended by itself: a write failed";

    if (!fs::exists(path)) {
      EXPECT_EQ(kill % 3, 0) << "an earlier file was lost";
      continue;
    }
    ++present;
    std::string fault;
    const auto results = read_result_file(path, fault);
    ASSERT_TRUE(results.has_value()) << "kill " << kill << ": " << fault;
    expect_whole(*results);
    if (results->attributes[0].second != "0") ++replaced;
  }

  // Kills in the midst of a write leave temporaries behind; they do no harm and are the only other thing there.
  int leftovers = 0;
  for (const auto& entry : fs::directory_iterator(name)) {
    if (entry.path() == path) continue;
    EXPECT_NE(entry.path().filename().string().find("case.h5.partial-"), std::string::npos) << entry.path();
    ++leftovers;
  }
  RecordProperty("files_present", present);
  RecordProperty("files_of_the_child", replaced);
  RecordProperty("temporaries_left", leftovers);
  fs::remove_all(name);
}

}  // namespace
}  // namespace leat
