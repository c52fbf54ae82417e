// The results file: what is written comes back, every promised reader opens it, and trouble with the disk is told.
#include <gtest/gtest.h>
#include <sched.h>
#include <sys/mount.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <bit>
#include <cmath>
#include <csignal>
#include <cstdint>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <functional>
#include <iterator>
#include <limits>
#include <optional>
#include <stdexcept>
#include <thread>
#include <tuple>
#include <utility>

#include "sim/results/hdf5_file.hpp"

namespace leat {
namespace {

namespace fs = std::filesystem;

const double nan = std::numeric_limits<double>::quiet_NaN();

// A folder of its own for each test, gone afterwards.
class ResultFile : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "leat_results_XXXXXX").string();
    ASSERT_NE(::mkdtemp(name.data()), nullptr);
    folder_ = name;
  }
  void TearDown() override {
    std::error_code ignored;
    fs::remove_all(folder_, ignored);
  }
  std::string path(const std::string& name = "case.h5") const { return (folder_ / name).string(); }

  fs::path folder_;
};

// 600 rows make more than two chunks; recovery is deflated, ph_setpoint is not; every kind of item is there.
ResultSet example(std::size_t rows = 600) {
  ResultSet set;
  set.attributes = {{"title", "Ammonia leach of a copper ore, 25 °C"}, {"history", "first line\nsecond line"}};
  set.axes = {{"time", "time since start", "h", {}, {}, true},
              {"unit", "unit operation", "", {"L1", "L2", "Th1"}, {}, false},
              {"species", "dissolved species", "", {"Cu(NH3)4^2+", "SO4^2-", "μ-test", ""}, {}, false},
              {"size", "particle size", "m", {}, {1e-6, 1e-5}, false},
              {"constant", "constant used", "", {"log10_beta"}, {}, false}};
  for (std::size_t i = 0; i < rows; ++i) set.axes[0].values.push_back(0.25 * static_cast<double>(i));
  Variable molality{"molality", "molality of a species", "mol kg-1", {"time", "unit", "species"}, {}};
  for (std::size_t i = 0; i < rows * 12; ++i) molality.values.push_back(std::sin(static_cast<double>(i)));
  if (rows > 0) molality.values[5] = nan;
  Variable ph{"ph_setpoint", "pH asked for", "1", {"time"}, std::vector<double>(rows, 9.5)};
  Flags status{"status", "solver status", {"time", "unit"}, {}, {"converged", "not_converged", "at_limit"}};
  for (std::size_t i = 0; i < rows * 3; ++i) status.values.push_back(static_cast<signed char>(i % 3));
  set.variables = {std::move(molality), std::move(ph), {"volume", "live volume", "m3", {"unit"}, {120, 120.5, -0.0}},
                   {"passing", "mass fraction passing", "1", {"unit", "size"}, {0, 1, 2, 3, 4, 5}},
                   {"site_pressure", "", "Pa", {}, {101325}}};
  set.flags = {std::move(status), {"closed", "", {}, {0}, {"yes"}}};
  set.texts = {{"constant_source", "where it is from", "constant", {"author, year, table 3"}},
               {"input_text", "the flowsheet as read", "", {"leat: 1\nkind: flowsheet\n"}}};
  return set;
}

bool same_bits(const std::vector<double>& a, const std::vector<double>& b) {
  return std::equal(a.begin(), a.end(), b.begin(), b.end(), [](double x, double y) {
    return (std::isnan(x) && std::isnan(y)) || std::bit_cast<std::uint64_t>(x) == std::bit_cast<std::uint64_t>(y);
  });
}

void expect_same(const ResultSet& a, const ResultSet& b) {
  EXPECT_EQ(a.attributes, b.attributes);
  ASSERT_EQ(a.axes.size(), b.axes.size());
  for (std::size_t i = 0; i < a.axes.size(); ++i) {
    EXPECT_EQ(std::tie(a.axes[i].name, a.axes[i].long_name, a.axes[i].units, a.axes[i].labels, a.axes[i].unlimited),
              std::tie(b.axes[i].name, b.axes[i].long_name, b.axes[i].units, b.axes[i].labels, b.axes[i].unlimited));
    EXPECT_TRUE(same_bits(a.axes[i].values, b.axes[i].values)) << a.axes[i].name;
  }
  ASSERT_EQ(a.variables.size(), b.variables.size());
  for (std::size_t i = 0; i < a.variables.size(); ++i) {
    const Variable &v = a.variables[i], &w = b.variables[i];
    EXPECT_EQ(std::tie(v.name, v.long_name, v.units, v.axes), std::tie(w.name, w.long_name, w.units, w.axes));
    EXPECT_TRUE(same_bits(v.values, w.values)) << v.name;
  }
  ASSERT_EQ(a.flags.size(), b.flags.size());
  for (std::size_t i = 0; i < a.flags.size(); ++i) {
    const Flags &v = a.flags[i], &w = b.flags[i];
    EXPECT_EQ(std::tie(v.name, v.long_name, v.axes, v.values, v.meanings),
              std::tie(w.name, w.long_name, w.axes, w.values, w.meanings));
  }
  ASSERT_EQ(a.texts.size(), b.texts.size());
  for (std::size_t i = 0; i < a.texts.size(); ++i) {
    const TextTable &v = a.texts[i], &w = b.texts[i];
    EXPECT_EQ(std::tie(v.name, v.long_name, v.axis, v.values), std::tie(w.name, w.long_name, w.axis, w.values));
  }
}

ResultSet written_and_read(const ResultSet& set, const std::string& path) {
  const FileOutcome outcome = write_result_file(set, path);
  EXPECT_TRUE(outcome.ok) << outcome.message;
  std::string fault;
  std::optional<ResultSet> back = read_result_file(path, fault);
  if (!back) throw std::runtime_error(fault);  // the test fails with it
  return std::move(*back);
}

std::string bytes_of(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(file), {}};
}

std::size_t entries(const fs::path& folder) {
  return static_cast<std::size_t>(std::distance(fs::directory_iterator(folder), fs::directory_iterator()));
}

// Runs the four readers of open_result.py, with nothing of the caller's environment.
int run_readers(const std::string& path, const std::string& expected = "") {
  const fs::path script = fs::absolute(fs::path(__FILE__).parent_path() / "open_result.py");
  const std::string command = "env -i /usr/bin/python3 '" + script.string() + "' '" + path + "' " + expected;
  return std::system(command.c_str());
}

// In a child, so that limits and rights of this process stay; the child's message comes back.
std::string message_in_child(const std::function<std::string()>& work) {
  int ends[2];
  if (::pipe(ends) != 0) return "no pipe";
  const pid_t child = ::fork();
  if (child == 0) {
    const std::string message = work();
    const bool told = ::write(ends[1], message.data(), message.size()) == static_cast<ssize_t>(message.size());
    ::_exit(told ? 0 : 1);
  }
  ::close(ends[1]);
  std::string message(4096, '\0');
  const ssize_t count = ::read(ends[0], message.data(), message.size());
  message.resize(count > 0 ? static_cast<std::size_t>(count) : 0);
  ::close(ends[0]);
  ::waitpid(child, nullptr, 0);
  return message;
}

TEST_F(ResultFile, ComesBackAsWritten) {
  const ResultSet set = example();
  expect_same(set, written_and_read(set, path()));
  EXPECT_EQ(entries(folder_), 1u);
}

TEST_F(ResultFile, OpensInEveryReader) {
  ASSERT_TRUE(write_result_file(example(), path()).ok);
  EXPECT_EQ(run_readers(path(), "time=600 unit=3 species=4 size=2"), 0);
}

TEST_F(ResultFile, SteadyCaseOfOneRowOpensInEveryReader) {
  expect_same(example(1), written_and_read(example(1), path()));
  EXPECT_EQ(run_readers(path(), "time=1"), 0);
}

TEST_F(ResultFile, AxesWithoutEntriesOpenInEveryReader) {
  ResultSet set = example(0);
  set.axes.push_back({"mineral", "mineral", "", {}, {}, false});
  set.variables.push_back({"extent", "conversion", "1", {"time", "mineral"}, {}});
  set.variables.push_back({"feed", "mineral fed", "kg s-1", {"unit", "mineral"}, {}});
  const ResultSet back = written_and_read(set, path());
  set.axes.back().unlimited = true;  // as the header says
  expect_same(set, back);
  EXPECT_EQ(run_readers(path(), "time=0 mineral=0"), 0);
}

TEST_F(ResultFile, LongAndStrangeTextsOpenInEveryReader) {
  ResultSet set = example(3);
  std::string text;
  while (text.size() < 200'000) text += "streams: {lixiviant: {rate: 22 m3/h}}  # µ \"quoted\" \\ line\n";
  set.attributes.emplace_back("long_text", text);
  set.attributes.emplace_back("empty_text", "");
  for (int i = 0; i < 40; ++i) set.attributes.emplace_back("note_" + std::to_string(i), "note");
  set.texts[1].values[0] = text;
  expect_same(set, written_and_read(set, path()));
  EXPECT_EQ(run_readers(path(), "time=3"), 0);
}

TEST_F(ResultFile, BytesThatAreNotUtf8AreReplaced) {
  ResultSet set = example(3);
  set.attributes.emplace_back("input_file", "caf\xE9.yaml");
  set.axes[1].labels[0] = "a\xC3";
  set.texts[0].values[0] = std::string("a\0b", 3);
  const ResultSet back = written_and_read(set, path());
  EXPECT_EQ(back.attributes.back().second, "caf\uFFFD.yaml");
  EXPECT_EQ(back.axes[1].labels[0], "a\uFFFD");
  EXPECT_EQ(back.texts[0].values[0], "a\uFFFDb");
  EXPECT_EQ(run_readers(path()), 0);
}

TEST_F(ResultFile, EqualDataGivesEqualBytes) {
  ASSERT_TRUE(write_result_file(example(), path("a.h5")).ok);
  ::sleep(1);  // a time stamp would differ; and a child with other rubbish in its memory
  const auto perturbed = [&] {
    std::vector<std::vector<char>> rubbish;
    for (std::size_t size = 16; size < 100'000; size += size / 4) rubbish.emplace_back(size, '\x5A');
    rubbish.clear();
    return write_result_file(example(), path("b.h5")).message;
  };
  EXPECT_EQ(message_in_child(perturbed), "");
  EXPECT_FALSE(bytes_of(path("a.h5")).empty());
  EXPECT_TRUE(bytes_of(path("a.h5")) == bytes_of(path("b.h5")));
}

TEST_F(ResultFile, ChunksStayBelowOneMegabyte) {
  ResultSet set = example(300);
  set.axes.push_back({"mode", "mode", "1", {}, {}, false});
  for (int i = 0; i < 2000; ++i) set.axes.back().values.push_back(i);
  set.variables.push_back({"lots", "lots", "mol", {"time", "unit", "mode"}, std::vector<double>(300 * 3 * 2000, 0.5)});
  expect_same(set, written_and_read(set, path()));
  EXPECT_LT(fs::file_size(path()), 1'000'000u);  // deflated
  EXPECT_EQ(run_readers(path()), 0);             // looks at the chunks
}

TEST_F(ResultFile, ThreadsMayWriteAtOnce) {
  std::vector<std::thread> threads;
  for (int i = 0; i < 4; ++i)
    threads.emplace_back([this, i] { EXPECT_TRUE(write_result_file(example(), path(std::to_string(i))).ok); });
  for (std::thread& thread : threads) thread.join();
  for (int i = 1; i < 4; ++i) EXPECT_TRUE(bytes_of(path("0")) == bytes_of(path(std::to_string(i))));
}

TEST_F(ResultFile, MissingFoldersAreMade) {
  EXPECT_TRUE(write_result_file(example(2), path("new/deep/case.h5")).ok);
  EXPECT_TRUE(fs::exists(path("new/deep/case.h5")));
}

TEST_F(ResultFile, EarlierFileIsReplacedAndFollowsTheUmask) {
  ASSERT_TRUE(write_result_file(example(2), path()).ok);
  expect_same(example(5), written_and_read(example(5), path()));
  const mode_t mask = ::umask(0);
  ::umask(mask);
  struct stat status {};
  ASSERT_EQ(::stat(path().c_str(), &status), 0);
  EXPECT_EQ(status.st_mode & 0777u, 0666u & ~mask);
}

void expect_refused(const FileOutcome& outcome, const std::string& path, const std::string& why) {
  EXPECT_FALSE(outcome.ok);
  EXPECT_EQ(outcome.message, path + ": not written: " + why);
}

TEST_F(ResultFile, FoldersAndDevicesAreRefused) {
  expect_refused(write_result_file(example(2), folder_.string()), folder_.string(), "it is a folder");
  expect_refused(write_result_file(example(2), path("sub/")), path("sub/"), "it names no file");
  expect_refused(write_result_file(example(2), "/dev/full"), "/dev/full", "it is a device, not a file");
  expect_refused(write_result_file(example(2), ""), "", "it names no file");
  std::ofstream(path("file")) << "text";
  expect_refused(write_result_file(example(2), path("file/case.h5")), path("file/case.h5"),
                 "the folder cannot be made: part of the path is a file, not a folder");
  const std::string long_name = path(std::string(250, 'x'));
  expect_refused(write_result_file(example(2), long_name), long_name, "the name is too long");
  EXPECT_EQ(entries(folder_), 1u);
}

TEST_F(ResultFile, FolderWithoutPermissionIsTold) {
  fs::permissions(folder_, fs::perms(0555));
  const std::string message = message_in_child([&] {
    if (::geteuid() == 0 && ::setuid(65534) != 0) return std::string("cannot give up root");
    return write_result_file(example(2), path()).message;
  });
  EXPECT_EQ(message, path() + ": not written: no permission to write in the folder");
  fs::permissions(folder_, fs::perms::owner_all);
  EXPECT_EQ(entries(folder_), 0u);
}

TEST_F(ResultFile, FileAboveTheLimitLeavesTheEarlierOne) {
  ASSERT_TRUE(write_result_file(example(2), path()).ok);
  const std::string message = message_in_child([&] {
    std::signal(SIGXFSZ, SIG_IGN);
    const rlimit limit{20'000, 20'000};
    ::setrlimit(RLIMIT_FSIZE, &limit);
    return write_result_file(example(600), path()).message;
  });
  EXPECT_EQ(message, path() + ": not written: the file would be larger than the system allows");
  EXPECT_EQ(entries(folder_), 1u);
  std::string fault;
  expect_same(example(2), read_result_file(path(), fault).value_or(ResultSet{}));
}

// A disk of 96 kB over the folder, seen by this process alone and gone with it. False where the system refuses.
bool mount_small_disk(const fs::path& folder) {
  const std::string user = std::to_string(::geteuid()), group = std::to_string(::getegid());
  if (::unshare(CLONE_NEWUSER | CLONE_NEWNS) != 0) return false;
  std::ofstream("/proc/self/setgroups") << "deny";
  std::ofstream("/proc/self/uid_map") << "0 " + user + " 1";
  std::ofstream("/proc/self/gid_map") << "0 " + group + " 1";
  return ::mount("tmpfs", folder.c_str(), "tmpfs", 0, "size=96k") == 0;
}

TEST_F(ResultFile, FullDiskIsToldAndLeavesTheEarlierOne) {
  const std::string message = message_in_child([&] {
    if (!mount_small_disk(folder_)) return std::string("no disk");
    const FileOutcome small = write_result_file(example(2), path());
    if (!small.ok) return small.message;
    const std::string full = write_result_file(example(600), path()).message;
    std::string fault;
    const auto earlier = read_result_file(path(), fault);
    if (!earlier || earlier->axes[0].size() != 2 || entries(folder_) != 1) return std::string("earlier file lost");
    return full;
  });
  if (message == "no disk") GTEST_SKIP() << "this machine lets no user mount a small disk";
  EXPECT_EQ(message, path() + ": not written: the disk is full");
}

TEST_F(ResultFile, UnreadableFilesAreTold) {
  std::string fault;
  EXPECT_FALSE(read_result_file(path("none.h5"), fault));
  EXPECT_EQ(fault, path("none.h5") + ": not read: there is no such file");
  std::ofstream(path("text.h5")) << "not HDF5";
  EXPECT_FALSE(read_result_file(path("text.h5"), fault));
  EXPECT_EQ(fault, path("text.h5") + ": not read: damaged, not allowed, or not HDF5");
  ASSERT_TRUE(write_result_file(example(), path()).ok);
  const auto size = fs::file_size(path());
  for (std::uintmax_t part = 1; part < 8; ++part) {
    fs::copy_file(path(), path("cut.h5"), fs::copy_options::overwrite_existing);
    fs::resize_file(path("cut.h5"), size * part / 8);
    EXPECT_FALSE(read_result_file(path("cut.h5"), fault)) << part;
  }
}

void expect_fault(const std::function<void(ResultSet&)>& spoil, const std::string& part) {
  ResultSet set = example(3);
  spoil(set);
  try {
    check_result_set(set);
    ADD_FAILURE() << "accepted; expected: " << part;
  } catch (const std::logic_error& error) {
    EXPECT_NE(std::string(error.what()).find(part), std::string::npos) << error.what();
  }
}

TEST(ResultSetCheck, NamesTheContradiction) {
  expect_fault([](ResultSet& s) { s.variables[0].values.pop_back(); }, "'molality': 35 values, its axes need 36");
  expect_fault([](ResultSet& s) { s.variables[1].units.clear(); }, "'ph_setpoint': no units");
  expect_fault([](ResultSet& s) { s.axes[0].units = "hours"; }, "'time': units 'hours'");
  expect_fault([](ResultSet& s) { s.variables[1].units = "days since 2000-01-01"; }, "'ph_setpoint': units");
  expect_fault([](ResultSet& s) { s.variables[1].name = "molality"; }, "'molality': the name is used twice");
  expect_fault([](ResultSet& s) { s.variables[1].name = "unit"; }, "'unit': the name is used twice");
  expect_fault([](ResultSet& s) { s.variables[1].name = "p-H"; }, "'p-H': a name needs letters");
  expect_fault([](ResultSet& s) { s.variables[1].name = "1st"; }, "'1st': a name needs letters");
  expect_fault([](ResultSet& s) { s.variables[1].axes = {"stream"}; }, "'ph_setpoint': has an axis 'stream'");
  expect_fault([](ResultSet& s) { s.variables[1].axes = {"time", "time"}; }, "'ph_setpoint': has one axis twice");
  expect_fault([](ResultSet& s) { s.axes[1].labels[1] = "L1"; }, "'unit': a label stands twice");
  expect_fault([](ResultSet& s) { s.axes[1].values = {1, 2, 3}; }, "'unit': has both labels and values");
  expect_fault([](ResultSet& s) { s.axes[0].values[1] = nan; }, "'time': a coordinate is not finite");
  expect_fault([](ResultSet& s) { s.flags[0].values[0] = 3; }, "'status': a value has no meaning");
  expect_fault([](ResultSet& s) { s.flags[0].meanings[0] = "all well"; }, "'status': a meaning is not one word");
  expect_fault([](ResultSet& s) { s.texts[0].values.clear(); }, "'constant_source': 0 values, its axes need 1");
  expect_fault([](ResultSet& s) { s.attributes.emplace_back("title", "again"); }, "'title': the attribute");
  expect_fault([](ResultSet& s) { s.attributes.emplace_back("Conventions", "CF"); }, "'Conventions': the");
}

}  // namespace
}  // namespace leat
