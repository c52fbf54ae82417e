// Place: where in an input file a value stands, carried by every value read so that a fault can name it.
#pragma once

#include <string>

namespace leat {

struct Place {
  std::string file;  // path as the user gave it
  int line = 0;      // 1-based; 0: the place is the whole file
  int column = 0;    // 1-based, in characters; 0: the place is the whole file
  std::string key;   // dotted path, circuit.L1.volume; list items as feed[0]; empty: the top of the file
};

// "tank.yaml:14:21 circuit.L1.volume"; parts that are not known are left out.
inline std::string to_string(const Place& place) {
  std::string text = place.file;
  if (place.line > 0) {
    text += ":" + std::to_string(place.line) + ":" + std::to_string(place.column);
  }
  if (!place.key.empty()) {
    text += (text.empty() ? "" : " ") + place.key;
  }
  return text;
}

// Order of reading: file, line, column, then key.
inline bool operator<(const Place& a, const Place& b) {
  if (a.file != b.file) return a.file < b.file;
  if (a.line != b.line) return a.line < b.line;
  if (a.column != b.column) return a.column < b.column;
  return a.key < b.key;
}

}  // namespace leat
