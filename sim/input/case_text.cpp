#include "sim/input/case_text.hpp"

#include <fmt/format.h>
#include <fmt/ranges.h>

#include <algorithm>
#include <charconv>
#include <map>

#include "models/core/check.hpp"
#include "models/core/nearest.hpp"
#include "sim/input/scalar_text.hpp"
#include "sim/input/yaml_document.hpp"
#include "sim/input/yaml_text.hpp"

namespace leat {
namespace {

constexpr std::size_t most_named = 12;  // keys listed in a fault

// The beginning of `rest` that is one of these words, up to a point or the end; the longest. Null if none fits.
template <class Item, class Word>
const Item* longest_fit(const std::vector<Item>& items, std::string_view rest, Word word, std::size_t& length) {
  const Item* best = nullptr;
  length = 0;
  for (const Item& item : items) {
    const std::string* name = word(item);
    if (!name || !rest.starts_with(*name) || (rest.size() > name->size() && rest[name->size()] != '.')) continue;
    if (best && name->size() <= length) continue;
    best = &item;
    length = name->size();
  }
  return best;
}

const std::string* name_of(const YamlNode& item) {
  const YamlNode* name = item.find("name");
  return name && name->is_scalar() ? &name->text : nullptr;
}

// An item by its name, else by its number from 1.
const YamlNode* item_of(const YamlNode& list, std::string_view rest, std::size_t& length) {
  if (const YamlNode* item = longest_fit(list.items, rest, name_of, length)) return item;
  const std::string_view word = rest.substr(0, rest.find('.'));
  std::size_t number = 0;
  const auto [end, error] = std::from_chars(word.data(), word.data() + word.size(), number);
  if (error != std::errc() || end != word.data() + word.size() || number < 1 || number > list.items.size()) return nullptr;
  length = word.size();
  return &list.items[number - 1];
}

std::vector<std::string> words_of(const YamlNode& node) {
  std::vector<std::string> words;
  for (const YamlNode::Entry& entry : node.entries) words.push_back(entry.key);
  for (std::size_t i = 0; i < node.items.size(); ++i) {
    const std::string* name = name_of(node.items[i]);
    words.push_back(name ? *name : std::to_string(i + 1));
  }
  return words;
}

// Where the way along a path ends: at a node, with what is left of the path (empty: all of it was followed).
struct Way {
  const YamlNode* node = nullptr;
  std::string_view followed, rest;
};

Way follow(const YamlNode& root, std::string_view path) {
  Way way{&root, path.substr(0, 0), path};
  while (true) {
    std::size_t length = 0;
    const YamlNode* next = nullptr;
    if (way.node->is_map()) {
      const auto* entry = longest_fit(way.node->entries, way.rest, [](const YamlNode::Entry& e) { return &e.key; }, length);
      next = entry ? &entry->value : nullptr;
    } else if (way.node->is_list()) {
      next = item_of(*way.node, way.rest, length);
    }
    if (!next || length == 0) return way;
    way.node = next;
    way.followed = path.substr(0, static_cast<std::size_t>(way.rest.data() - path.data()) + length);
    if (way.rest.size() == length) {
      way.rest = {};
      return way;
    }
    way.rest.remove_prefix(length + 1);
    if (way.rest.empty()) return {way.node, way.followed, "."};  // a path that ends in a point
  }
}

// The word nearest to the beginning of what is left; keys may hold points, so beginnings of several lengths are judged.
std::string near_word(std::string_view rest, const std::vector<std::string>& words) {
  std::map<std::size_t, std::vector<std::string>> by_points;
  for (const std::string& word : words) by_points[static_cast<std::size_t>(std::count(word.begin(), word.end(), '.'))].push_back(word);
  for (const auto& [points, some] : by_points) {
    std::size_t end = rest.find('.');
    for (std::size_t k = 0; k < points && end != std::string_view::npos; ++k) end = rest.find('.', end + 1);
    const std::string found = nearest(rest.substr(0, end), some);
    if (!found.empty()) return found;
  }
  return "";
}

std::string listed(const std::vector<std::string>& words) {
  const std::size_t shown = std::min(words.size(), most_named);
  const std::string text = fmt::format("{}", fmt::join(words.begin(), words.begin() + static_cast<std::ptrdiff_t>(shown), ", "));
  return shown < words.size() ? fmt::format("{} and {} more", text, words.size() - shown) : text;
}

// The first single value below a node, as a path from it.
std::string example_below(const YamlNode& node) {
  for (const YamlNode::Entry& entry : node.entries)
    if (entry.value.is_scalar()) return entry.key;
  if (!node.items.empty() && node.items.front().is_scalar()) return "1";
  if (!node.entries.empty()) return node.entries.front().key + "." + example_below(node.entries.front().value);
  if (!node.items.empty()) return words_of(node).front() + "." + example_below(node.items.front());
  return "";
}

bool equal_trees(const YamlNode& a, const YamlNode& b) {
  if (a.kind != b.kind || a.items.size() != b.items.size() || a.entries.size() != b.entries.size()) return false;
  if (a.is_scalar() && (a.text != b.text || a.quoted != b.quoted)) return false;
  for (std::size_t i = 0; i < a.items.size(); ++i)
    if (!equal_trees(a.items[i], b.items[i])) return false;
  for (std::size_t i = 0; i < a.entries.size(); ++i)
    if (a.entries[i].key != b.entries[i].key || !equal_trees(a.entries[i].value, b.entries[i].value)) return false;
  return true;
}

}  // namespace

struct CaseText::Parts {
  std::string text, file;
  YamlNode root;

  const YamlNode& single(std::string_view path) const {
    const Way way = follow(root, path);
    check(way.rest.empty() && way.node->is_scalar(), fmt::format("'{}' names no single value", path));
    return *way.node;
  }
};

std::optional<CaseText> CaseText::read(std::string text, const std::string& file, Diagnostics& diagnostics) {
  std::optional<YamlNode> root = read_yaml(text, file, diagnostics);
  if (!root) return std::nullopt;
  CaseText out;
  out.parts_ = std::make_shared<Parts>(Parts{std::move(text), file, std::move(*root)});
  return out;
}

bool CaseText::has(std::string_view path, const Place& from, Diagnostics& diagnostics) const {
  const Way way = follow(parts_->root, path);
  const auto refuse = [&](Code code, const std::string& why) {
    diagnostics.fault(code, from, fmt::format("'{}' {}", shown_text(path), why));
    return false;
  };
  if (!way.rest.empty()) {
    const std::string where = way.followed.empty() ? "its top" : fmt::format("'{}'", way.followed);
    const std::string missing = shown_text(way.rest.substr(0, way.rest.size() > 1 ? way.rest.find('.') : 1));
    if (way.node->is_scalar()) return refuse(Code::unknown_name, fmt::format("goes on behind {}, which is a single value in {}; end the path there", where, parts_->file));
    const std::vector<std::string> words = words_of(*way.node);
    const std::string near = near_word(way.rest, words);
    return refuse(Code::unknown_name, fmt::format("is not in {}: {} has no '{}'{} It has: {}. What is varied must stand in the file: give it a value there first",
                                                  parts_->file, where, missing, near.empty() ? "." : "; did you mean '" + near + "'?", listed(words)));
  }
  if (!way.node->is_scalar()) {
    const std::string below = example_below(*way.node);
    const std::string example = below.empty() ? "" : fmt::format(", such as {}.{}", path, below);
    return refuse(Code::wrong_kind, fmt::format("is a {}, not a single value; name one value in it{}", way.node->is_map() ? "map" : "list", example));
  }
  if (!find_scalar(parts_->text, *way.node))
    return refuse(Code::not_supported, fmt::format("cannot be varied: its value spans lines (line {} of {}); write it in one line", way.node->place.line, parts_->file));
  return true;
}

std::string CaseText::value(std::string_view path) const { return parts_->single(path).text; }

bool CaseText::same(std::string_view path, std::string_view other) const { return &parts_->single(path) == &parts_->single(other); }

std::string CaseText::with(std::span<const std::pair<std::string, std::string>> inputs) const {
  struct Change {
    ScalarRange range;
    const std::string* value;
  };
  std::vector<Change> changes;
  YamlNode expected = parts_->root;
  for (const auto& [path, value] : inputs) {
    check(value_fault(value).empty(), "a value that cannot stand in a file");
    const auto range = find_scalar(parts_->text, parts_->single(path));
    check(range.has_value(), fmt::format("the value at '{}' spans lines", path));
    changes.push_back({*range, &value});
    auto& node = const_cast<YamlNode&>(*follow(expected, path).node);
    node.text = value;
    node.quoted = !stands_plain(value);
  }
  std::sort(changes.begin(), changes.end(), [](const Change& a, const Change& b) { return a.range.begin < b.range.begin; });
  std::string text;
  std::size_t done = 0;  // [byte]
  for (const Change& change : changes) {
    check(change.range.begin >= done, "one value is replaced twice");
    text.append(parts_->text, done, change.range.begin - done).append(written_scalar(*change.value));
    done = change.range.end;
  }
  text.append(parts_->text, done);
  Diagnostics faults;
  const auto again = read_yaml(text, parts_->file, faults);
  check(again.has_value(), "a variant is no YAML: " + (faults.ok() ? "" : to_string(faults.faults().front())));
  check(equal_trees(*again, expected), "a variant changes more, or less, than it should");
  return text;
}

std::string CaseText::at_top(std::string_view key) const {
  const YamlNode* node = parts_->root.find(key);
  return node && node->is_scalar() ? node->text : "";
}

std::vector<std::string> CaseText::names_in(std::string_view key) const {
  const YamlNode* node = parts_->root.find(key);
  return node && node->is_list() ? words_of(*node) : std::vector<std::string>{};
}

const std::string& CaseText::text() const { return parts_->text; }

std::string value_fault(std::string_view value) {
  return only_text(value) ? "" : "the value is not UTF-8 or holds a sign that cannot be seen";
}

}  // namespace leat
