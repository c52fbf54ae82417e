#include <atomic>
#include <csignal>
#include <cstdio>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <stdexcept>

#include "models/data/embedded.hpp"
#include "sim/input/read_library.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

// The one thing a signal can reach.
std::atomic<bool>& stop_flag() {
  static std::atomic<bool> asked{false};
  return asked;
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
  if (!in) diagnostics.fault(Code::bad_yaml, {file, 0, 0, ""}, "cannot be read");
  return all.str();
}

std::string base_name(const std::string& file) { return std::filesystem::path(file).filename().string(); }

std::string default_output(const std::string& file, const std::string& ending) {
  return (std::filesystem::path("outputs") / std::filesystem::path(file).stem()).string() + ending;
}

std::string program_name() { return std::string("leat ") + LEAT_VERSION; }

}  // namespace leat
