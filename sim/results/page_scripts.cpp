#include "sim/results/page_scripts.hpp"

// Written by sim/results/page/CMakeLists.txt: each asset from its name to its end.
extern "C" {
extern const char leat_page_charts[], leat_page_charts_end[];
extern const char leat_page_diagram[], leat_page_diagram_end[];
extern const char leat_page_loader[], leat_page_loader_end[];
extern const char leat_page_style[], leat_page_style_end[];
extern const char leat_page_notices[], leat_page_notices_end[];
}

namespace leat {
namespace {

std::string_view between(const char* begin, const char* end) { return {begin, static_cast<std::size_t>(end - begin)}; }

}  // namespace

PageScripts page_scripts() {
  return {between(leat_page_charts, leat_page_charts_end), between(leat_page_diagram, leat_page_diagram_end),
          between(leat_page_loader, leat_page_loader_end), between(leat_page_style, leat_page_style_end),
          between(leat_page_notices, leat_page_notices_end)};
}

}  // namespace leat
