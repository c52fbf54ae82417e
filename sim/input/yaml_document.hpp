// yaml_document: a YAML text as plain nodes, each with its place. The strict part of YAML that a flowsheet needs:
//   read:    maps, lists, scalars (plain, quoted, block), comments, flow style
//   refused: doubled keys, quotes left open, text left over, anchors, aliases, tags, empty values, a second document,
//            text that is not UTF-8, NUL, nesting deeper than 64, more than 64 MB
// A scalar stays text here; what it means is decided by TypedReader.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "models/core/diagnostics.hpp"
#include "models/core/place.hpp"

namespace leat {

struct YamlNode {
  enum class Kind { scalar, list, map };
  struct Entry;

  Kind kind = Kind::scalar;
  std::string text;            // of a scalar, quotes and escapes resolved
  bool quoted = false;         // scalar in quotes or as a block: text, never a bare number or true
  Place place;                 // where the value starts; place.key is its dotted path
  std::vector<YamlNode> items;  // of a list
  std::vector<Entry> entries;   // of a map, in the order of the file

  bool is_scalar() const { return kind == Kind::scalar; }
  bool is_list() const { return kind == Kind::list; }
  bool is_map() const { return kind == Kind::map; }

  // The value under a key of this map; null if there is none or this is no map.
  const YamlNode* find(std::string_view key) const;
};

struct YamlNode::Entry {
  std::string key;
  Place key_place;  // where the key stands; key_place.key is the dotted path of the value
  YamlNode value;
};

inline constexpr std::size_t yaml_size_limit = 64u << 20;  // longest text read [byte]
inline constexpr int yaml_depth_limit = 64;                // deepest nesting of maps and lists [1]

// The document, or nothing with at least one fault (code bad_yaml, or duplicate for a doubled key), each with its line and column.
std::optional<YamlNode> read_yaml(std::string_view text, const std::string& file, Diagnostics& diagnostics);

// The same from a file; one that cannot be read is a fault placed at the file. The path is the name used in places.
std::optional<YamlNode> read_yaml_file(const std::string& path, Diagnostics& diagnostics);

}  // namespace leat
