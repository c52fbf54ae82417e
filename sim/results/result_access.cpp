#include "sim/results/result_access.hpp"

#include <algorithm>

namespace leat {
namespace {

template <class Item>
const Item* find(const std::vector<Item>& items, std::string_view name) {
  const auto found = std::find_if(items.begin(), items.end(), [&](const Item& one) { return one.name == name; });
  return found == items.end() ? nullptr : &*found;
}

}  // namespace

const Axis* find_axis(const ResultSet& results, std::string_view name) { return find(results.axes, name); }
const Variable* find_variable(const ResultSet& results, std::string_view name) { return find(results.variables, name); }
const TextTable* find_texts(const ResultSet& results, std::string_view name) { return find(results.texts, name); }
const Flags* find_flags(const ResultSet& results, std::string_view name) { return find(results.flags, name); }

std::string attribute(const ResultSet& results, std::string_view name) {
  for (const auto& [key, text] : results.attributes)
    if (key == name) return text;
  return {};
}

std::size_t axis_size(const ResultSet& results, std::string_view name) {
  const Axis* axis = find_axis(results, name);
  return axis ? axis->size() : 0;
}

}  // namespace leat
