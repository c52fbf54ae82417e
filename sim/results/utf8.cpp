#include "sim/results/utf8.hpp"

#include <array>
#include <cstddef>

namespace leat {
namespace {

struct WidthRange {
  char32_t first, last;
  int width;
};

// Sorted. The blocks a terminal draws with no width of their own, or two columns wide; all others take one.
constexpr std::array<WidthRange, 15> width_ranges = {{{0x0300, 0x036F, 0},
                                                      {0x1100, 0x115F, 2},
                                                      {0x200B, 0x200F, 0},
                                                      {0x20D0, 0x20FF, 0},
                                                      {0x2E80, 0x303E, 2},
                                                      {0x3041, 0xA4CF, 2},
                                                      {0xAC00, 0xD7A3, 2},
                                                      {0xF900, 0xFAFF, 2},
                                                      {0xFE00, 0xFE0F, 0},
                                                      {0xFE30, 0xFE6F, 2},
                                                      {0xFF00, 0xFF60, 2},
                                                      {0xFFE0, 0xFFE6, 2},
                                                      {0x1F300, 0x1F64F, 2},
                                                      {0x1F900, 0x1F9FF, 2},
                                                      {0x20000, 0x3FFFD, 2}}};

int code_point_width(char32_t point) {
  for (const WidthRange& range : width_ranges) {
    if (point < range.first) return 1;
    if (point <= range.last) return range.width;
  }
  return 1;
}

unsigned char byte_at(std::string_view text, std::size_t i) { return static_cast<unsigned char>(text[i]); }

// Bytes of the character that begins at i, 0 when there is none that UTF-8 allows.
std::size_t character_length(std::string_view text, std::size_t i) {
  const unsigned char lead = byte_at(text, i);
  if (lead < 0x80) return lead == 0 ? 0 : 1;
  if (lead < 0xC2 || lead > 0xF4) return 0;
  const std::size_t length = lead >= 0xF0 ? 4 : lead >= 0xE0 ? 3 : 2;
  if (i + length > text.size()) return 0;
  for (std::size_t k = 1; k < length; ++k)
    if ((byte_at(text, i + k) & 0xC0u) != 0x80u) return 0;
  const unsigned char second = byte_at(text, i + 1);
  const bool overlong = (lead == 0xE0 && second < 0xA0) || (lead == 0xF0 && second < 0x90);
  const bool no_character = (lead == 0xED && second > 0x9F) || (lead == 0xF4 && second > 0x8F);
  return overlong || no_character ? 0 : length;
}

}  // namespace

std::string readable_text(std::string_view text) {
  std::string out;
  for (std::size_t i = 0; i < text.size();) {
    const std::size_t length = character_length(text, i);
    if (length > 0) out += text.substr(i, length);
    else out += "\xEF\xBF\xBD";
    i += length > 0 ? length : 1;
  }
  return out;
}

int display_width(std::string_view utf8) {
  int width = 0;
  for (std::size_t i = 0; i < utf8.size();) {
    const auto lead = static_cast<unsigned char>(utf8[i++]);
    char32_t point = lead;
    if (lead >= 0xC0) point = lead >= 0xF0 ? lead & 0x07u : lead >= 0xE0 ? lead & 0x0Fu : lead & 0x1Fu;
    while (i < utf8.size() && (static_cast<unsigned char>(utf8[i]) & 0xC0u) == 0x80u)
      point = (point << 6) | (static_cast<unsigned char>(utf8[i++]) & 0x3Fu);
    width += code_point_width(point);
  }
  return width;
}

}  // namespace leat
