#include <atomic>
#include <csignal>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <stdexcept>

#include "models/data/embedded.hpp"
#include "sim/input/read_library.hpp"
#include "sim/results/result_access.hpp"
#include "sim/study/digest.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

// The one thing a signal can reach.
std::atomic<bool>& stop_flag() {
  static std::atomic<bool> asked{false};
  return asked;
}

constexpr const char* hdf5_mark = "\x89HDF";
constexpr const char* sqlite_mark = "SQLite format 3";

std::string head_of(const std::string& file) {
  std::ifstream in(file, std::ios::binary);
  std::string head(16, '\0');
  in.read(head.data(), static_cast<std::streamsize>(head.size()));
  return head;
}

extern "C" void take_stop(int) {
  stop_flag().store(true);
  std::signal(SIGINT, SIG_DFL);  // the second one ends the program
  std::signal(SIGTERM, SIG_DFL);
}

}  // namespace

void listen_for_stop() {
  stop_flag().store(false);  // made before a signal can ask for it
  struct sigaction action = {};
  action.sa_handler = take_stop;
  action.sa_flags = SA_RESTART;
  sigemptyset(&action.sa_mask);
  sigaddset(&action.sa_mask, SIGINT);
  sigaddset(&action.sa_mask, SIGTERM);
  for (const int number : {SIGINT, SIGTERM}) {
    struct sigaction before = {};
    sigaction(number, nullptr, &before);
    if (before.sa_handler != SIG_IGN) sigaction(number, &action, nullptr);  // as under nohup: ignored stays ignored
  }
}

bool stop_asked() { return stop_flag().load(); }

SpeciesLibrary load_library() {
  std::vector<std::pair<std::string_view, std::string_view>> files;
  for (const EmbeddedFile& file : embedded_data()) files.emplace_back(file.name, file.text);
  Diagnostics diagnostics;
  SpeciesLibrary library = read_library(files, diagnostics);
  if (!diagnostics.ok()) throw std::logic_error("the data library is at fault: " + to_string(diagnostics.faults().front()));
  return library;
}

std::string read_text(const std::string& file, Diagnostics& diagnostics) {
  std::error_code error;
  if (std::filesystem::is_directory(file, error)) {
    diagnostics.fault(Code::bad_yaml, {file, 0, 0, ""}, "is a folder, not a file");
    return {};
  }
  std::ifstream in(file, std::ios::binary);
  std::stringstream all;
  if (in) all << in.rdbuf();
  if (!in) diagnostics.fault(Code::bad_yaml, {file, 0, 0, ""}, std::string("cannot be read: ") + std::strerror(errno));
  const std::string head = all.str().substr(0, 16);
  if (head.starts_with(hdf5_mark)) diagnostics.fault(Code::bad_yaml, {file, 0, 0, ""}, "is a results file, not a text; leat report shows it");
  if (head.starts_with(sqlite_mark)) diagnostics.fault(Code::bad_yaml, {file, 0, 0, ""}, "is a ledger, not a text; leat report shows it");
  return all.str();
}

std::string base_name(const std::string& file) { return std::filesystem::path(file).filename().string(); }

std::string default_output(const std::string& file, const std::string& ending) {
  return (std::filesystem::path("outputs") / std::filesystem::path(file).stem()).string() + ending;
}

std::string page_beside(const std::string& results) {
  const std::string page = std::filesystem::path(results).replace_extension(".html").string();
  return page == results ? page + ".html" : page;
}

std::string reason_of(const Diagnostics& diagnostics) {
  const auto faults = diagnostics.sorted_faults();
  if (faults.empty()) return {};
  return to_string(faults.front()) + (faults.size() > 1 ? " (and " + std::to_string(faults.size() - 1) + " more)" : "");
}

std::vector<std::string> lines_of(const ResultSet& results, const char* texts) {
  std::vector<std::string> lines;
  const TextTable* found = find_texts(results, texts);
  std::istringstream all(found && !found->values.empty() ? found->values.front() : "");
  for (std::string line; std::getline(all, line);)
    if (!line.empty()) lines.push_back(line);
  return lines;
}

bool written(const FileOutcome& outcome, const std::string& what, const std::string& path, Answer& answer) {
  if (outcome.ok) {
    answer.written.emplace_back(what, path);
    return true;
  }
  answer.exit_code = Exit::machine_trouble;
  answer.failure = outcome.message;
  return false;
}

bool may_replace(const std::string& out, const std::string& input, Answer& answer) {
  std::error_code error;
  if (!std::filesystem::is_regular_file(out, error) || std::filesystem::file_size(out, error) == 0) return true;
  if (std::filesystem::equivalent(out, input, error)) answer.failure = "--out is the input itself; results need a name of their own";
  else if (head_of(out).compare(0, 4, hdf5_mark) != 0) answer.failure = out + " is there and is no results file; give another name with --out, or move it away";
  if (answer.failure.empty()) return true;
  answer.exit_code = Exit::usage;
  return false;
}

std::string program_identity() {
  Digest library;
  for (const EmbeddedFile& file : embedded_data()) {
    library.add_text(file.name);
    library.add_text(file.text);
  }
  return program_name() + ", library " + library.hex().substr(0, 8);
}

std::string program_name() { return std::string("leat ") + LEAT_VERSION; }

}  // namespace leat
