// CaseText: a flowsheet or beaker file with single values replaced, all else, comments included, as it stands. A variant
// is so a file like any other: it can be written out, read and run by itself.
#pragma once

#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "models/core/diagnostics.hpp"

namespace leat {

class CaseText {
 public:
  // Nothing, with faults, if the text is no YAML.
  static std::optional<CaseText> read(std::string text, const std::string& file, Diagnostics& diagnostics);

  // Whether a path names a single value of the file; a fault placed at `from` with the nearest key if not. A path is keys
  // joined by points, `streams.wash.rate`; a list's items go by their `name` or by number from 1, `steps.2.heat_to`. Keys may
  // hold points themselves: at each map the longest one that fits is taken.
  bool has(std::string_view path, const Place& from, Diagnostics& diagnostics) const;

  // What stands at a path now, as typed. The path must be one that `has` found; std::logic_error otherwise.
  std::string value(std::string_view path) const;

  // Whether two such paths name one value, though written differently (`steps.2`, `steps.warmed`).
  bool same(std::string_view path, std::string_view other) const;

  // The whole text with the values at these paths replaced; quoted where YAML needs it. Paths as `has` found them, each once.
  std::string with(std::span<const std::pair<std::string, std::string>> inputs) const;

  // What the file says under a key of its top (`kind`); "" where there is no single value. Names of the items of a list there.
  std::string at_top(std::string_view key) const;
  std::vector<std::string> names_in(std::string_view key) const;

  const std::string& text() const;

 private:
  struct Parts;
  std::shared_ptr<const Parts> parts_;
};

// Why a text cannot stand as a value in a file, "" if it can: it is not UTF-8 or holds signs that cannot be seen.
std::string value_fault(std::string_view value);

}  // namespace leat
