#pragma once
#include <set>
#include <string>

#include "models/process/catalogue.hpp"
#include "models/chemistry/chemistry.hpp"
#include "sim/circuit/flowsheet.hpp"

namespace leat {

// What the `chemistry` of a file and the components it needs ask of the library.
ChemistryRequest request_of(const ChemistrySpec& chemistry, const std::set<std::string>& components, const Catalogue& catalogue);

}  // namespace leat
