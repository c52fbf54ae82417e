// The flowsheet file: what the user typed, with places, checked as far as no chemistry is needed.
//   checked here:  keys, kinds of values, units, ranges, names of liquors, solids, reagents, gas streams, models and laws; sums of shares
//   not here:      whether names are species or minerals, whether every outlet goes somewhere, charge, reactions
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "models/core/diagnostics.hpp"
#include "models/process/catalogue.hpp"
#include "sim/circuit/flowsheet.hpp"

namespace leat {

// What was read, or nothing if the text is no YAML. With a fault in `diagnostics` it must not be used.
std::optional<Flowsheet> read_flowsheet(std::string_view text, const std::string& file, const Catalogue& catalogue, Diagnostics& diagnostics);

// What a file says it is: "flowsheet", "beaker", "ladder" or "campaign"; "" with a fault if it says none of them.
std::string file_kind(std::string_view text, const std::string& file, Diagnostics& diagnostics);

}  // namespace leat
