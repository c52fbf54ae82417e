#pragma once
#include <span>
#include <string_view>

namespace leat {

// One file of models/data as it stood at build time; the program carries its library with it.
struct EmbeddedFile {
  std::string_view name;  // relative to models/data, e.g. species/ammine.yaml
  std::string_view text;
};
std::span<const EmbeddedFile> embedded_data();

}  // namespace leat
