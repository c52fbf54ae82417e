// Checks of a YAML text that need no parser, because the parser would let these through. Used by yaml_document.cpp alone.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <utility>

#include "models/core/diagnostics.hpp"

namespace leat {

// Length of the UTF-8 character at the start of a text, 0 if it is none [byte]. `point` becomes its number.
inline std::size_t character_length(std::string_view text, char32_t& point) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned char first = byte(0);
  const std::size_t length = first < 0x80 ? 1 : first >= 0xC2 && first < 0xE0 ? 2 : first >= 0xE0 && first < 0xF0 ? 3 : first >= 0xF0 && first < 0xF5 ? 4 : 0;
  if (length == 0 || text.size() < length) return 0;
  point = length == 1 ? first : first & (0x7Fu >> length);
  for (std::size_t i = 1; i < length; ++i) {
    if ((byte(i) & 0xC0) != 0x80) return 0;
    point = (point << 6) | (byte(i) & 0x3Fu);
  }
  const bool overlong = (length == 3 && point < 0x800) || (length == 4 && point < 0x10000);
  const bool surrogate = point >= 0xD800 && point <= 0xDFFF;
  return overlong || surrogate || point > 0x10FFFF ? 0 : length;
}

// Why a character may not stand in the text, "" if it may.
inline std::string character_fault(char32_t point, std::string_view after) {
  if (point == 0) return "a NUL character in the text; is this a text file?";
  if (point == '\r') return after.starts_with('\n') ? "" : "a carriage return without a line feed; end lines with a line feed";
  if (point == '\t' || point == '\n') return "";
  if (point < 0x20 || (point >= 0x7F && point < 0xA0) || point == 0xFFFE || point == 0xFFFF) return "a control character that cannot be seen; remove it";
  if (point == 0x2028 || point == 0x2029) return "a line or paragraph separator that cannot be seen; write a line feed";
  if (point == 0xFEFF) return "a byte-order mark inside the text; remove it";
  return "";
}

// Checks each character; that no line starts with '%' (the parser drops such a line without a word when nothing follows);
// and that no tab stands in the indentation (the parser takes some of them).
inline bool check_characters(std::string_view text, const std::string& file, Diagnostics& diagnostics) {
  int line = 1;
  int column = 1;
  bool in_lead = true;  // nothing but blanks and the signs - ? : so far in this line
  for (std::size_t i = 0; i < text.size();) {
    char32_t point = 0;
    const std::size_t length = character_length(text.substr(i), point);
    std::string fault = length == 0 ? "the text is not UTF-8; save the file in that encoding" : character_fault(point, text.substr(i + length));
    in_lead = in_lead && std::string_view(" -?:\t\r\n").find(text[i]) != std::string_view::npos;
    if (in_lead && point == '\t' && fault.empty()) fault = "a tab in the indentation; indent with blanks";
    if (column == 1 && point == '%' && fault.empty()) fault = "a line that starts with '%' is a directive, which is not read; remove it";
    if (!fault.empty()) {
      diagnostics.fault(Code::bad_yaml, {file, line, column, ""}, std::move(fault));
      return false;
    }
    i += length;
    ++column;
    if (point == '\n') {
      ++line;
      column = 1;
      in_lead = true;
    }
  }
  return true;
}

// No character that character_fault refuses, in a text whose escapes are resolved. A carriage return may be escaped.
inline bool only_text(std::string_view text) {
  while (!text.empty()) {
    char32_t point = 0;
    const std::size_t length = character_length(text, point);
    if (length == 0 || (point != '\r' && !character_fault(point, "").empty())) return false;
    text.remove_prefix(length);
  }
  return true;
}

// \' inside a text in double quotes; the parser takes it, YAML does not know it.
inline bool has_escaped_apostrophe(std::string_view text) {
  for (std::size_t i = 0; i + 1 < text.size(); ++i) {
    if (text[i] != '\\') continue;
    if (text[++i] == '\'') return true;
  }
  return false;
}

// Where a quoted scalar ends: the byte after its closing quote, or npos when it never closes. `text` starts at the opening quote.
inline std::size_t closing_quote(std::string_view text) {
  const char quote = text[0];
  for (std::size_t i = 1; i < text.size(); ++i) {
    if (quote == '"' && text[i] == '\\') {
      ++i;
    } else if (text[i] == quote) {
      if (quote == '"' || i + 1 == text.size() || text[i + 1] != '\'') return i + 1;
      ++i;  // '' is an apostrophe
    }
  }
  return std::string_view::npos;
}

}  // namespace leat
