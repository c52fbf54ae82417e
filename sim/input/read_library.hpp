#pragma once
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "models/chemistry/species_library.hpp"
#include "models/core/diagnostics.hpp"

namespace leat {

// Reads the files of models/data (name relative to that folder, text) into a library. Nothing without a known source
// and an evidence loads; a reaction that does not balance in elements and charge is a fault.
SpeciesLibrary read_library(std::span<const std::pair<std::string_view, std::string_view>> files, Diagnostics& diagnostics);


}  // namespace leat
