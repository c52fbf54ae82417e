#pragma once
#include "models/chemistry/chemistry.hpp"
#include "sim/results/run_layout.hpp"

namespace leat {

// Parts that run and beaker files share: attributes, axes of the chemistry, constants with their sources, cautions.
void add_source(ResultSet& set, const SourceText& source, const char* kind);
void add_chemistry(ResultSet& set, const Chemistry& chemistry, const SpeciesLibrary& library);
void add_cautions(ResultSet& set, const std::vector<Caution>& cautions);

}  // namespace leat
