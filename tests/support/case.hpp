// A flowsheet written in a test, built with the embedded library and run as the program runs it.
#pragma once

#include <gtest/gtest.h>

#include <optional>
#include <string>
#include <vector>

#include "models/process/catalogue.hpp"
#include "sim/circuit/build_circuit.hpp"
#include "sim/run/run_case.hpp"

namespace leat::test {

const Catalogue& registered();  // what the register knows

// A flowsheet that was read and built. A fault throws with all of them in its text.
struct Case {
  Flowsheet flowsheet;
  BuiltCase built;

  RunResult run(const RunOptions& options = {}) const { return run_case(flowsheet, built, options); }
};
Case build(const std::string& text, const Catalogue& catalogue = registered());

// Every fault of reading and building, one to a line; empty if the text builds.
std::string faults_of(const std::string& text, const Catalogue& catalogue = registered());

// Built and run; what was not solved fails the test with the reason.
RunResult run(const std::string& text, const RunOptions& options = {}, const Catalogue& catalogue = registered());

// By name, as a flowsheet names them (a unit with one outlet stands for it); a name that is not there throws.
int stream_of(const RunResult& result, const std::string& name);
const StreamSnapshot& stream(const RunResult& result, const Snapshot& at, const std::string& name);
const UnitSnapshot& unit(const RunResult& result, const Snapshot& at, const std::string& name);
int component_of(const RunResult& result, const std::string& name);
int element_of(const RunResult& result, const std::string& name);
int lot_of(const RunResult& result, const std::string& name);

// Flow of a component, in the liquor and the solids formed from it [mol/s].
double flow(const RunResult& result, const Snapshot& at, const std::string& stream_name, const std::string& component);
// The same per volume of liquor [mol/m3].
double content(const RunResult& result, const Snapshot& at, const std::string& stream_name, const std::string& component);
double lot_flow(const RunResult& result, const Snapshot& at, const std::string& stream_name, const std::string& lot);  // [mol/s]
// Dissolved total in a vessel [mol/m3].
double held(const RunResult& result, const Snapshot& at, const std::string& unit_name, const std::string& component);
// Place of an element among those whose recovery is reported.
std::size_t recovered_of(const RunResult& result, const std::string& element);
double extraction(const RunResult& result, const Snapshot& at, const std::string& element);  // now [1]
double recovery(const RunResult& result, const Snapshot& at, const std::string& element);    // now [1]

}  // namespace leat::test
