#include "sim/input/scalar_text.hpp"

#include <algorithm>
#include <array>

#include "sim/input/yaml_text.hpp"

namespace leat {
namespace {

bool letter_or_digit(char c) { return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9'); }
bool beyond_ascii(char c) { return static_cast<unsigned char>(c) >= 0x80; }

// Byte at which a place (line and column from 1, columns in characters) stands; npos if the text is shorter.
std::size_t byte_of(std::string_view text, const Place& place) {
  std::size_t at = text.starts_with("\xEF\xBB\xBF") ? 3 : 0;  // columns of the first line count behind a byte-order mark
  for (int line = 1; line < place.line; ++line) {
    at = text.find('\n', at);
    if (at == std::string_view::npos) return at;
    ++at;
  }
  for (int column = 1; column < place.column; ++column) {
    if (at >= text.size()) return std::string_view::npos;
    for (++at; at < text.size() && (static_cast<unsigned char>(text[at]) & 0xC0) == 0x80;) ++at;
  }
  return at;
}

}  // namespace

std::optional<ScalarRange> find_scalar(std::string_view text, const YamlNode& scalar) {
  const std::size_t begin = byte_of(text, scalar.place);
  if (begin >= text.size()) return std::nullopt;
  const std::string_view from = text.substr(begin);
  if (!scalar.quoted) {  // a plain text in one line stands letter by letter; one in several lines was folded
    if (from.substr(0, scalar.text.size()) != scalar.text) return std::nullopt;
    return ScalarRange{begin, begin + scalar.text.size()};
  }
  if (from[0] != '"' && from[0] != '\'') return std::nullopt;  // | or >
  const std::size_t length = closing_quote(from);
  if (length == std::string_view::npos || from.substr(0, length).find('\n') != std::string_view::npos) return std::nullopt;
  return ScalarRange{begin, begin + length};
}

bool stands_plain(std::string_view value) {
  constexpr std::string_view inside = " .+-*/%()^_=<>;$~";
  constexpr std::array<std::string_view, 5> nulls = {"", "~", "null", "Null", "NULL"};
  if (std::find(nulls.begin(), nulls.end(), value) != nulls.end() || value.back() == ' ') return false;
  const char first = value[0];
  const bool starts = letter_or_digit(first) || beyond_ascii(first) || first == '(' || (first == '-' && value.size() > 1 && letter_or_digit(value[1]));
  return starts && std::all_of(value.begin(), value.end(), [&](char c) {
    return letter_or_digit(c) || beyond_ascii(c) || inside.find(c) != std::string_view::npos;
  });
}

std::string written_scalar(std::string_view value) {
  if (stands_plain(value)) return std::string(value);
  std::string text;
  if (value.find_first_of("\n\r\t") == std::string_view::npos) {
    for (char c : value) text += c == '\'' ? "''" : std::string(1, c);
    return "'" + text + "'";
  }
  for (char c : value) {
    const std::string_view signs = "\n\r\t\"\\", letters = "nrt\"\\";
    const std::size_t sign = signs.find(c);
    text += sign == std::string_view::npos ? std::string(1, c) : std::string("\\") + letters[sign];
  }
  return "\"" + text + "\"";
}

std::string shown_text(std::string_view text) {
  constexpr std::size_t longest = 60;  // [byte]
  std::size_t length = std::min(text.size(), longest);
  while (length < text.size() && (static_cast<unsigned char>(text[length]) & 0xC0) == 0x80) --length;  // not inside a character
  std::string result(text.substr(0, length));
  for (char& c : result)
    if (c == '\n' || c == '\t' || c == '\r') c = ' ';
  return length < text.size() ? result + "..." : result;
}

}  // namespace leat
