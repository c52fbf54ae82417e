#pragma once
#include <string_view>

namespace leat {

// What the page carries besides its content; all empty where the program was built without pages.
struct PageScripts {
  std::string_view charts;   // script, gzip in base64
  std::string_view diagram;  // the same, for pages with a flow diagram
  std::string_view loader;   // script that inflates the others
  std::string_view style;    // CSS
  std::string_view notices;  // licences of the software inside
};

PageScripts page_scripts();

}  // namespace leat
