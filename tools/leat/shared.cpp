#include <fmt/format.h>

#include <cstdio>
#include <filesystem>
#include <fstream>
#include <sstream>
#include <stdexcept>

#include "models/data/embedded.hpp"
#include "sim/input/read_library.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {

SpeciesLibrary load_library() {
  std::vector<std::pair<std::string_view, std::string_view>> files;
  for (const EmbeddedFile& file : embedded_data()) files.emplace_back(file.name, file.text);
  Diagnostics diagnostics;
  SpeciesLibrary library = read_library(files, diagnostics);
  if (!diagnostics.ok()) throw std::logic_error("the data library is at fault: " + to_string(diagnostics.faults().front()));
  return library;
}

bool read_text(const std::string& file, std::string& text) {
  std::error_code error;
  if (std::filesystem::is_directory(file, error)) {
    fmt::print(stderr, "{}: is a folder, not a file\n", file);
    return false;
  }
  std::ifstream in(file, std::ios::binary);
  if (!in) {
    fmt::print(stderr, "{}: cannot be read\n", file);
    return false;
  }
  std::stringstream all;
  all << in.rdbuf();
  text = all.str();
  return true;
}

int tell_faults(const Diagnostics& diagnostics, const std::string& file) {
  const auto faults = diagnostics.sorted_faults();
  for (const Diagnostic& fault : faults) fmt::print(stderr, "{}\n", to_string(fault));
  fmt::print(stderr, "{}: {} fault{}; nothing was calculated or written\n", file, faults.size(), faults.size() == 1 ? "" : "s");
  return Exit::input_faults;
}

void tell_cautions(const Diagnostics& diagnostics) {
  for (const Diagnostic& caution : diagnostics.cautions()) fmt::print(stderr, "caution: {}\n", to_string(caution));
}

std::string base_name(const std::string& file) { return std::filesystem::path(file).filename().string(); }

std::string default_output(const std::string& file) {
  return (std::filesystem::path("outputs") / std::filesystem::path(file).stem()).string() + ".h5";
}

std::string program_name() { return std::string("leat ") + LEAT_VERSION; }

}  // namespace leat
