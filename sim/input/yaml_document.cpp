#include "sim/input/yaml_document.hpp"

#include <yaml-cpp/eventhandler.h>
#include <yaml-cpp/exceptions.h>
#include <yaml-cpp/mark.h>
#include <yaml-cpp/parser.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <istream>
#include <iterator>
#include <streambuf>
#include <unordered_set>
#include <utility>

#include "sim/input/yaml_text.hpp"

namespace leat {
namespace {

constexpr std::string_view byte_order_mark = "\xEF\xBB\xBF";

// Thrown through the parser when reading on makes no sense; the fault itself is already noted.
struct StopReading {};

// A text as an input stream, without copying it.
class TextBuffer : public std::streambuf {
 public:
  explicit TextBuffer(std::string_view text) {
    char* begin = const_cast<char*>(text.data());  // only read; the interface wants it so
    setg(begin, begin, begin + text.size());
  }
};

// Turns the parser's marks (from 0, in bytes) into places (from 1, in characters).
class PlaceFinder {
 public:
  PlaceFinder(std::string_view text, const std::string& file) : text_(text), file_(file) {}

  Place place(const YAML::Mark& mark, std::string key) {
    if (mark.is_null()) return {file_, 0, 0, std::move(key)};
    const auto pos = std::min(static_cast<std::size_t>(std::max(mark.pos, 0)), text_.size());
    const auto line_start = pos - std::min(static_cast<std::size_t>(std::max(mark.column, 0)), pos);
    if (line_start != line_start_ || pos < counted_to_) {
      line_start_ = counted_to_ = line_start;
      column_ = 1;
    }
    for (; counted_to_ < pos; ++counted_to_) {
      if ((static_cast<unsigned char>(text_[counted_to_]) & 0xC0) != 0x80) ++column_;
    }
    return {file_, mark.line + 1, column_, std::move(key)};
  }

  char byte_at(const YAML::Mark& mark) const {
    const auto pos = static_cast<std::size_t>(std::max(mark.pos, 0));
    return pos < text_.size() ? text_[pos] : '\0';
  }

  // The key at the mark follows a '?' that is the first sign of its line, or of its entry in { }.
  bool is_explicit_key(const YAML::Mark& mark) const {
    const std::string_view before = text_.substr(0, text_.size() - from(mark).size());
    const std::size_t sign = before.find_last_not_of(" \n\r");
    if (sign == std::string_view::npos || before[sign] != '?') return false;
    const std::size_t ahead = before.substr(0, sign).find_last_not_of(" -");
    return ahead == std::string_view::npos || std::string_view("\n{,[").find(before[ahead]) != std::string_view::npos;
  }

  std::string_view from(const YAML::Mark& mark) const { return text_.substr(std::min(static_cast<std::size_t>(std::max(mark.pos, 0)), text_.size())); }

 private:
  std::string_view text_;
  const std::string& file_;
  std::size_t line_start_ = 0;  // line of the last answer, so that long lines are not counted again and again [byte]
  std::size_t counted_to_ = 0;  // [byte]
  int column_ = 1;
};

// Builds nodes from the parser's events and notes all that is refused.
class NodeBuilder : public YAML::EventHandler {
 public:
  NodeBuilder(PlaceFinder& finder, Diagnostics& diagnostics) : finder_(finder), diagnostics_(diagnostics) {}

  std::optional<YamlNode> take_root() { return std::move(root_); }

  // The path of the key read last, for faults of the parser.
  std::string last_path() const {
    const bool between = wants_key() && entries_.size() > frames_.back().first;
    return between ? entries_.back().key_place.key : value_path();
  }
  int last_quote_line() const { return last_quote_line_; }  // line of the last quoted scalar if it spans lines, else 0

  void OnDocumentStart(const YAML::Mark& mark) override {
    if (!root_) return;
    const std::string_view rest = finder_.from(mark);
    refuse(mark, "", rest.starts_with("---") ? "a second document; one file holds one document"
                                             : "text left over behind the end of the document; check indentation and brackets");
    throw StopReading();
  }
  void OnDocumentEnd() override {}

  void OnNull(const YAML::Mark& mark, YAML::anchor_t) override {
    last_quote_line_ = 0;
    if (wants_key()) {
      refuse(mark, value_path(), "an empty key; write a word before the colon");
      throw StopReading();
    }
    const bool under_key = !frames_.empty() && frames_.back().key;
    const std::string word(finder_.from(mark).substr(0, 1) == "~" ? "'~'" : "nothing");
    if (under_key) {
      const Place place = frames_.back().key_place;
      diagnostics_.fault(Code::bad_yaml, place, "'" + *frames_.back().key + "' has no value; write one after a colon and a blank, or leave the key out");
    } else {
      refuse(mark, value_path(), "an empty value (" + word + "); write a value or leave it out");
    }
    add(scalar(mark, ""));
  }

  void OnAlias(const YAML::Mark& mark, YAML::anchor_t) override {
    last_quote_line_ = 0;
    refuse(mark, value_path(), "an alias ('*name') is not read; write the value out");
    if (wants_key()) throw StopReading();
    add(scalar(mark, ""));
  }

  void OnScalar(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor, const std::string& value) override {
    const char first = finder_.byte_at(mark);
    last_quote_line_ = 0;
    if (first == '"' || first == '\'') check_quote(mark, value);
    if (wants_key()) {
      check_plain(mark, tag, anchor, value_path());
      if (finder_.is_explicit_key(mark)) {
        refuse(mark, value_path(), "a key behind a '?' is not read; write 'key: value'");
        throw StopReading();
      }
      open_key(mark, value);
      return;
    }
    check_plain(mark, tag, anchor, value_path());
    check_indent(mark);
    YamlNode node = scalar(mark, value);
    node.quoted = tag == "!";
    if (first == '>') node.text.erase(node.text.find_last_not_of(' ') + 1);  // no blanks at the end, where parsers differ
    add(std::move(node));
  }

  void OnSequenceStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor, YAML::EmitterStyle::value style) override {
    open(mark, tag, anchor, YamlNode::Kind::list, style);
  }
  void OnMapStart(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor, YAML::EmitterStyle::value style) override {
    open(mark, tag, anchor, YamlNode::Kind::map, style);
  }
  void OnSequenceEnd() override { close(); }
  void OnMapEnd() override { close(); }

 private:
  // A list or map that is still open. What it holds so far ends items_ or entries_, from `first` on: one long vector grows seldom.
  struct Frame {
    YamlNode node;
    std::size_t first = 0;
    std::optional<std::string> key;  // of a map: read, its value not yet
    Place key_place;
    std::unordered_set<std::string> keys;  // of a long map; a short one is looked through
    bool in_brackets = false;  // written with [ ] or { }, or inside such
  };

  bool wants_key() const { return !frames_.empty() && frames_.back().node.is_map() && !frames_.back().key; }

  void refuse(const YAML::Mark& mark, std::string key, std::string text) {
    diagnostics_.fault(Code::bad_yaml, finder_.place(mark, std::move(key)), std::move(text));
  }

  std::string value_path() const {
    if (frames_.empty()) return "";
    const Frame& frame = frames_.back();
    if (frame.node.is_list()) return frame.node.place.key + "[" + std::to_string(items_.size() - frame.first) + "]";
    return frame.key ? frame.key_place.key : frame.node.place.key;
  }

  YamlNode scalar(const YAML::Mark& mark, std::string text) {
    YamlNode node;
    node.text = std::move(text);
    node.place = finder_.place(mark, value_path());
    return node;
  }

  // A quote that never closes swallows the rest of the file, without a word from the parser.
  // Escapes must be YAML's own and must not make characters that may not stand in the text itself.
  void check_quote(const YAML::Mark& mark, std::string_view value) {
    const std::string_view rest = finder_.from(mark);
    const std::size_t end = closing_quote(rest);
    if (end == std::string_view::npos) {
      refuse(mark, value_path(), std::string("the quote ") + rest[0] + " is opened here and never closed");
      throw StopReading();
    }
    if (rest[0] == '"' && has_escaped_apostrophe(rest.substr(0, end))) refuse(mark, value_path(), "\\' is no escape; an apostrophe stands as it is");
    if (rest[0] == '"' && !only_text(value)) refuse(mark, value_path(), "an escape makes a character that cannot be seen or is not UTF-8");
    if (rest.substr(0, end).find('\n') != std::string_view::npos) last_quote_line_ = mark.line + 1;
  }

  // No anchor and no tag. A tag may read like none ("! x", "!<?> x"), so the first byte is judged as well.
  void check_plain(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor, const std::string& key) {
    const char first = finder_.byte_at(mark);
    if (anchor != 0 || first == '&') refuse(mark, key, "an anchor ('&name') is not read; remove it");
    if (first == ':') refuse(mark, key, "a text that starts with ':'; put it in quotes");
    if ((tag != "?" && tag != "!") || first == '!') refuse(mark, key, "a tag ('!name') is not read; remove it");
  }

  // A value in a line of its own stands deeper than its key; only the items of a list may stand right below it.
  void check_indent(const YAML::Mark& mark) {
    const std::string_view rest = finder_.from(mark);
    const bool is_item = rest.starts_with("- ") || rest.starts_with("-\n") || rest.starts_with("-\r");
    if (frames_.empty() || !frames_.back().key || frames_.back().in_brackets || is_item) return;
    const Place& key = frames_.back().key_place;
    const Place value = finder_.place(mark, key.key);
    if (value.line > key.line && value.column <= key.column) {
      diagnostics_.fault(Code::bad_yaml, value, "a value in a line of its own must be indented deeper than its key");
    }
  }

  void open_key(const YAML::Mark& mark, const std::string& key) {
    Frame& frame = frames_.back();
    const std::string& parent = frame.node.place.key;
    const Place place = finder_.place(mark, parent.empty() ? key : parent + "." + key);
    if (key.empty()) diagnostics_.fault(Code::bad_yaml, place, "an empty key; write a word before the colon");
    if (key == "<<") diagnostics_.fault(Code::bad_yaml, place, "a merge ('<<') is not read; write the keys out");
    if (is_doubled(frame, key)) {
      const auto first = find_key(frame, key);
      const int line = first == entries_.end() ? 0 : first->key_place.line;
      diagnostics_.fault(Code::duplicate, place, "'" + key + "' is given twice; it stands already in line " + std::to_string(line));
    }
    frame.key = key;
    frame.key_place = place;
  }

  std::vector<YamlNode::Entry>::const_iterator find_key(const Frame& frame, const std::string& key) const {
    return std::find_if(entries_.begin() + static_cast<std::ptrdiff_t>(frame.first), entries_.end(), [&](const auto& entry) { return entry.key == key; });
  }

  bool is_doubled(Frame& frame, const std::string& key) const {
    constexpr std::size_t short_map = 16;  // keys [1]
    const std::size_t known = entries_.size() - frame.first;
    if (known < short_map) return find_key(frame, key) != entries_.end();
    if (frame.keys.empty())
      for (std::size_t k = frame.first; k < entries_.size(); ++k) frame.keys.insert(entries_[k].key);
    return !frame.keys.insert(key).second;
  }

  void open(const YAML::Mark& mark, const std::string& tag, YAML::anchor_t anchor, YamlNode::Kind kind,
            YAML::EmitterStyle::value style) {
    last_quote_line_ = 0;
    if (wants_key()) {
      refuse(mark, value_path(), "a list or map used as a key; a key is a word");
      throw StopReading();
    }
    if (frames_.size() >= static_cast<std::size_t>(yaml_depth_limit)) {
      refuse(mark, value_path(), "lists and maps are nested deeper than " + std::to_string(yaml_depth_limit));
      throw StopReading();
    }
    check_plain(mark, tag == "!" ? "!!" : tag, anchor, value_path());
    check_indent(mark);
    Frame frame;
    frame.in_brackets = style == YAML::EmitterStyle::Flow || (!frames_.empty() && frames_.back().in_brackets);
    frame.node.kind = kind;
    frame.first = kind == YamlNode::Kind::list ? items_.size() : entries_.size();
    frame.node.place = finder_.place(mark, value_path());
    frames_.push_back(std::move(frame));
  }

  void close() {
    last_quote_line_ = 0;
    YamlNode node = std::move(frames_.back().node);
    const std::size_t first = frames_.back().first;
    frames_.pop_back();
    if (node.is_list()) take_from(items_, first, node.items);
    else take_from(entries_, first, node.entries);
    add(std::move(node));
  }

  void add(YamlNode node) {
    if (frames_.empty()) {
      root_ = std::move(node);
      return;
    }
    Frame& frame = frames_.back();
    if (frame.node.is_list()) {
      items_.push_back(std::move(node));
    } else {
      entries_.push_back({std::move(*frame.key), std::move(frame.key_place), std::move(node)});
      frame.key.reset();
    }
  }

  template <class One>
  static void take_from(std::vector<One>& all, std::size_t first, std::vector<One>& own) {
    const auto begin = all.begin() + static_cast<std::ptrdiff_t>(first);
    own.assign(std::make_move_iterator(begin), std::make_move_iterator(all.end()));
    all.erase(begin, all.end());
  }

  PlaceFinder& finder_;
  Diagnostics& diagnostics_;
  std::vector<Frame> frames_;
  std::vector<YamlNode> items_;           // of the open lists
  std::vector<YamlNode::Entry> entries_;  // of the open maps
  std::optional<YamlNode> root_;
  int last_quote_line_ = 0;
};

// The parser's short messages in words that say what to do.
std::string parser_fault(const std::string& message) {
  static constexpr std::pair<std::string_view, std::string_view> rows[] = {
      {"illegal map value", "a ': ' that cannot stand here; check the indentation, and put quotes around a text that holds ': '"},
      {"end of map not found", "text that belongs to no key; check the indentation, quotes and brackets before it"},
      {"end of sequence not found", "text that is no item of the list; check the indentation, and start each item with '- '"},
      {"end of sequence flow not found", "a list opened by '[' that is not closed; write ',' between items and ']' at the end"},
      {"end of map flow not found", "a map opened by '{' that is not closed; write ',' between entries and '}' at the end"},
      {"illegal flow end", "a ']' or '}' that nothing has opened"},
      {"illegal block entry", "a '- ' that cannot stand here; start a list on its own line, or write it as [a, b]"},
      {"illegal map key", "a '? ' that cannot stand here"},
      {"unknown token", "a text that starts with a reserved sign (@ ` % ? or a tab); put it in quotes"},
      {"the referenced anchor is not defined", "an alias ('*name') is not read; write the value out"},
  };
  for (const auto& [theirs, ours] : rows) {
    if (message.starts_with(theirs)) return std::string(ours);
  }
  return "the text is not YAML: " + message;
}

// Runs the parser over a checked text; faults are noted, the root is left in the builder.
void parse(std::string_view text, PlaceFinder& finder, NodeBuilder& builder, Diagnostics& diagnostics) {
  TextBuffer buffer(text);
  std::istream stream(&buffer);
  try {
    YAML::Parser parser(stream);
    while (parser.HandleNextDocument(builder)) {
    }
  } catch (const StopReading&) {
  } catch (const YAML::Exception& error) {
    std::string fault = parser_fault(error.msg);
    if (builder.last_quote_line() > 0) {
      fault += "; is the quote opened in line " + std::to_string(builder.last_quote_line()) + " closed where it should be?";
    }
    diagnostics.fault(Code::bad_yaml, finder.place(error.mark, builder.last_path()), std::move(fault));
  }
}

}  // namespace

const YamlNode* YamlNode::find(std::string_view key) const {
  for (const Entry& entry : entries) {
    if (entry.key == key) return &entry.value;
  }
  return nullptr;
}

std::optional<YamlNode> read_yaml(std::string_view text, const std::string& file, Diagnostics& diagnostics) {
  if (text.size() > yaml_size_limit) {
    diagnostics.fault(Code::bad_yaml, {file, 0, 0, ""}, "the text is longer than 64 MB");
    return std::nullopt;
  }
  if (text.starts_with(byte_order_mark)) text.remove_prefix(byte_order_mark.size());
  const std::size_t faults_before = diagnostics.faults().size();
  if (!check_characters(text, file, diagnostics)) return std::nullopt;
  PlaceFinder finder(text, file);
  NodeBuilder builder(finder, diagnostics);
  parse(text, finder, builder, diagnostics);
  if (diagnostics.faults().size() > faults_before) return std::nullopt;
  std::optional<YamlNode> root = builder.take_root();
  if (!root) {
    diagnostics.fault(Code::bad_yaml, {file, 1, 1, ""}, "the file holds nothing; write at least one 'key: value'");
  } else if (root->is_scalar()) {
    diagnostics.fault(Code::bad_yaml, root->place, "the file holds a single text; write 'key: value', with a blank behind the colon");
    root.reset();
  }
  return root;
}

std::optional<YamlNode> read_yaml_file(const std::string& path, Diagnostics& diagnostics) {
  const auto refuse = [&](const std::string& why) {
    diagnostics.fault(Code::bad_yaml, {path, 0, 0, ""}, why);
    return std::nullopt;
  };
  std::error_code error;
  if (std::filesystem::is_directory(path, error)) return refuse("cannot be read: it is a folder");
  errno = 0;
  std::ifstream stream(path, std::ios::binary);
  if (!stream) return refuse(std::string("cannot be read: ") + std::strerror(errno));
  std::string text;
  std::vector<char> block(1u << 16);
  while (text.size() <= yaml_size_limit && (stream.read(block.data(), static_cast<std::streamsize>(block.size())), stream.gcount() > 0)) {
    text.append(block.data(), static_cast<std::size_t>(stream.gcount()));
  }
  if (stream.bad()) return refuse("cannot be read to its end");
  return read_yaml(text, path, diagnostics);
}

}  // namespace leat
