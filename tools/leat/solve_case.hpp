#pragma once
#include <functional>
#include <optional>
#include <string>

#include "models/process/catalogue.hpp"
#include "sim/results/result_set.hpp"
#include "sim/run/run_result.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {

// What became of one case file.
struct SolvedCase {
  Exit exit = Exit::done;
  std::string failure;                // why it is not done; faults of the input stand in `diagnostics`
  Diagnostics diagnostics;            // of the file
  std::optional<ResultSet> results;   // all that closed: there although exit is not done where a history closed without a
                                      // steady state, or was stopped
  std::vector<Caution> cautions;
};

struct SolveSettings {
  bool through_time = true;                    // run the history, if the flowsheet has one
  std::function<void(double share)> progress;  // through time, 0 to 1; may be empty
  std::function<bool()> stop;                  // asked at each stored time; may be empty
};

// The one way from a case file's text, flowsheet or beaker, to its results; every verb that solves takes it. Cold from the
// text alone, so that equal texts give equal results to the bit.
class CaseSolver {
 public:
  CaseSolver();
  SolvedCase solve(const std::string& text, const std::string& file, const SolveSettings& settings = {}) const;

  // What is wrong with a case's text, without solving more than that takes.
  Diagnostics faults(const std::string& text, const std::string& file) const;

  const SpeciesLibrary& library() const { return library_; }
  const Catalogue& catalogue() const { return catalogue_; }

 private:
  SolvedCase solve_flowsheet(const std::string& text, const std::string& file, const SolveSettings& settings) const;
  SolvedCase solve_beaker(const std::string& text, const std::string& file) const;

  SpeciesLibrary library_;
  Catalogue catalogue_;
};

}  // namespace leat
