// utf8: what the results door must know of UTF-8 text.
#pragma once

#include <string>
#include <string_view>

namespace leat {

// The text with NUL and bytes that are not UTF-8 (a file's name may hold such) replaced by U+FFFD. Readers of results
// files decode strictly: one bad byte and the whole file would not open.
std::string readable_text(std::string_view text);

// Columns the text takes in a terminal: combining marks take none, East Asian wide characters two.
int display_width(std::string_view utf8);

}  // namespace leat
