#include "sim/input/study_reader.hpp"

#include <fmt/format.h>

#include <cerrno>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <vector>

#include "models/core/nearest.hpp"
#include "sim/input/scalar_text.hpp"
#include "sim/input/file_kinds.hpp"

namespace leat {

std::optional<std::string> whole_text(const std::string& path, std::string& why) {
  std::error_code error;
  if (std::filesystem::is_directory(path, error)) {
    why = "is a folder, not a file";
    return std::nullopt;
  }
  errno = 0;
  std::ifstream stream(path, std::ios::binary);
  if (!stream) {
    why = fmt::format("cannot be read: {}", std::strerror(errno));
    return std::nullopt;
  }
  std::string text;
  std::vector<char> block(1u << 16);
  while (text.size() <= yaml_size_limit && (stream.read(block.data(), static_cast<std::streamsize>(block.size())), stream.gcount() > 0))
    text.append(block.data(), static_cast<std::size_t>(stream.gcount()));
  if (stream.bad()) why = "cannot be read to its end";
  if (text.size() > yaml_size_limit) why = "is longer than 64 MB";
  return why.empty() ? std::optional(std::move(text)) : std::nullopt;
}

bool StudyReader::head(const YamlNode& root, const std::string& kind, std::string& title) {
  if (const YamlNode* node = typed_.required(root, "leat")) typed_.whole_number(*node, 1, 1);
  bool right = false;
  if (const YamlNode* node = typed_.required(root, "kind")) {
    const auto word = typed_.choice(*node, file_kinds());
    right = word && *word == kind;
    if (word && !right) {
      const bool a_case = *word == "flowsheet" || *word == "beaker";
      const std::string step = kind == "ladder" && a_case ? " To step one of its inputs, say which behind --vary" : "";
      fault(Code::unknown_name, node->place, fmt::format("the file is of kind '{}'; {} is needed here. Use {}.{}", *word, kind, verb_for(*word), step));
    }
  }
  if (const YamlNode* node = root.find("title")) title = typed_.text(*node).value_or("");
  return right;
}

std::string StudyReader::beside(const std::string& name) const { return (std::filesystem::path(file_).parent_path() / name).string(); }

std::optional<OpenCase> StudyReader::base_case(const YamlNode& node) {
  const auto name = typed_.text(node);
  if (!name) return std::nullopt;
  const auto refuse = [&](const std::string& why) {
    fault(Code::unknown_name, node.place, fmt::format("'{}' {}", shown_text(*name), why));
    return std::nullopt;
  };
  OpenCase open;
  open.base = {*name, beside(*name), "", node.place};
  std::string why;
  const auto text = whole_text(open.base.path, why);
  if (!text) return refuse(why + "; name a flowsheet or beaker by its path from the folder of this file");
  open.base.text = *text;
  Diagnostics own;
  const auto read = CaseText::read(*text, open.base.path, own);
  if (!read) return refuse("cannot be used: " + to_string(own.sorted_faults().front()));
  open.text = *read;
  const std::string kind = read->at_top("kind");
  if (kind == "ladder" || kind == "campaign") return refuse(fmt::format("is a {}; a study starts from a flowsheet or a beaker", kind));
  if (kind != "flowsheet" && kind != "beaker")
    return refuse(fmt::format("is no case: {}; a study starts from a flowsheet or a beaker", kind.empty() ? "it has no kind" : "its kind is '" + shown_text(kind) + "'"));
  return open;
}

std::optional<VariedInput> StudyReader::varied(const YamlNode::Entry& entry, const OpenCase* open) {
  const bool known = open && open->text.has(entry.key, entry.key_place, diagnostics_);
  std::optional<VariedInput> out;
  if (entry.value.is_scalar())
    out = read_sentence(entry.value.text, entry.value.place, diagnostics_);
  else if (entry.value.is_list())
    out = read_value_list(entry.value, diagnostics_);
  else
    fault(Code::wrong_kind, entry.value.place, "a map stands here; write its path with points up to one value, and behind it a range or a list");
  if (!out || !known) return std::nullopt;
  out->path = entry.key;
  out->place = entry.key_place;
  return out;
}

}  // namespace leat
