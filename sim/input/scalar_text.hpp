// scalar_text: where a single value stands in a YAML text, and how a value is written in its place.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>

#include "sim/input/yaml_document.hpp"

namespace leat {

struct ScalarRange {
  std::size_t begin = 0, end = 0;  // [byte]; quotes belong to it
};

// Nothing for a value that spans lines: a block, or a text in several lines.
std::optional<ScalarRange> find_scalar(std::string_view text, const YamlNode& scalar);

// Whether a value reads back as itself without quotes, in a block as in { } and [ ]. Narrower than YAML; never wider.
bool stands_plain(std::string_view value);

// A value as it is written in one line: plain where it can stand so, else in quotes.
std::string written_scalar(std::string_view value);

// A typed text in a message: on one line, not too long.
std::string shown_text(std::string_view text);

}  // namespace leat
