// The beaker file: one liquor with solids and gases at equilibrium, and what is done to it step by step.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "models/core/diagnostics.hpp"
#include "models/process/catalogue.hpp"
#include "sim/circuit/flowsheet.hpp"

namespace leat {

// What was read, or nothing if the text is no YAML. With a fault in `diagnostics` it must not be used.
std::optional<BeakerSpec> read_beaker(std::string_view text, const std::string& file, const Catalogue& catalogue, Diagnostics& diagnostics);

}  // namespace leat
