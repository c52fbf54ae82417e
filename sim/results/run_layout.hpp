#pragma once
#include "sim/results/result_set.hpp"
#include "sim/run/run_result.hpp"
#include "sim/run/speciate.hpp"

namespace leat {

// The names, axes, units and meanings of the results file (outputs/README.md describes them; a test compares).
inline constexpr const char* format_version = "2";

struct SourceText {
  std::string file;     // name of the input file, without folders
  std::string text;     // its whole text
  std::string title;
  std::string program;  // name and version
};

// A run as it stands in the file: one row per stored time, or one row for a steady case.
ResultSet layout_of(const RunResult& result, const SpeciesLibrary& library, const SourceText& source);

// A beaker: one row per step.
ResultSet layout_of(const BeakerResult& result, const SpeciesLibrary& library, const SourceText& source);

}  // namespace leat
