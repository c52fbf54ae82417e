// Ladder and campaign files, and the sentence that varies one input.
#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "models/core/diagnostics.hpp"
#include "sim/study/study_spec.hpp"

namespace leat {

// `PATH: 0.5 mol/L to 6 mol/L in 12 points`, `PATH = 0.01 to 1 g/L in 5 logarithmic points`, `PATH: [a, b, c]`, as on the
// command line. Nothing, with a fault at `place`, if it cannot be read. Whether the case has such a path is not asked here.
std::optional<VariedInput> read_varied(std::string_view sentence, const Place& place, Diagnostics& diagnostics);

// The file, its base cases read from beside it, its paths checked against them. Nothing, with faults, if not usable.
std::optional<LadderSpec> read_ladder(std::string_view text, const std::string& file, Diagnostics& diagnostics);
std::optional<CampaignSpec> read_campaign(std::string_view text, const std::string& file, Diagnostics& diagnostics);

// A ladder without a file of its own: a case and the sentence behind --vary.
std::optional<LadderSpec> ladder_of_case(std::string_view text, const std::string& file, std::string_view sentence, Diagnostics& diagnostics);

}  // namespace leat
