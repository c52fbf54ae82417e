// The kinds of file there are, and the verb that reads each.
#pragma once

#include <string>
#include <vector>

namespace leat {

inline const std::vector<std::string>& file_kinds() {
  static const std::vector<std::string> kinds = {"flowsheet", "beaker", "ladder", "campaign"};
  return kinds;
}

inline std::string verb_for(const std::string& kind) {
  return kind == "beaker" ? "leat speciate" : kind == "flowsheet" ? "leat run" : "leat " + kind;
}

}  // namespace leat
