// What a ladder or campaign file says: plain structs, filled by sim/input.
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "models/core/place.hpp"

namespace leat {

// One input of a case and the values it takes, as they go into the file: "0.5 mol/L", "3", "davies".
struct VariedInput {
  std::string path;                 // streams.wash.rate
  std::vector<std::string> values;
  std::vector<double> numbers;      // the same as numbers in `unit`, one a value; empty if any is not a quantity
  std::string unit;                 // as typed; "" for bare numbers
  bool logarithmic = false;
  Place place;
};

// A case file a study starts from.
struct BaseCase {
  std::string file;                 // as typed
  std::string path;                 // where it is, from the working folder
  std::string text;                 // its whole text
  Place place;
};

// A ladder: one input of a case stepped; several series side by side compare cases.
struct LadderSeries {
  std::string name;
  BaseCase base;
  VariedInput vary;
};
struct LadderSpec {
  std::string title;
  std::string file;                 // the ladder file or, without one, the case file
  std::string text;                 // its text
  std::vector<LadderSeries> series; // at least one
  std::string step;                 // of beakers: the step that is read; empty: the last
};

struct CampaignSpec {
  std::string title;
  std::string file, text;           // the campaign file
  BaseCase base;
  std::vector<VariedInput> grid;    // every combination, the last varying fastest
  std::vector<std::vector<std::pair<std::string, std::string>>> listed;  // cases one by one (path, value), each crossed with the grid
  std::vector<std::string> watch;   // names as find_value takes them
  std::vector<Place> watch_places;
  std::string rank_by;              // one of `watch`
  bool largest_first = true;
  bool through_time = true;         // run the history, if the flowsheet has one
  bool keep_results = true;         // a results file for each case
  double time_limit = 600;          // of one case [s]
};

}  // namespace leat
