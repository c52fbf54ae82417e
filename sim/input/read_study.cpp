#include "sim/input/read_study.hpp"

#include <fmt/format.h>
#include <fmt/ranges.h>

#include <algorithm>
#include <filesystem>

#include "models/core/nearest.hpp"
#include "sim/input/file_kinds.hpp"
#include "sim/input/scalar_text.hpp"
#include "sim/input/study_reader.hpp"

namespace leat {
namespace {

constexpr std::size_t most_rungs = 10000;  // of all series together

class LadderReader : public StudyReader {
 public:
  using StudyReader::StudyReader;

  void read(const YamlNode& root, LadderSpec& ladder) {
    static const std::vector<std::string> keys = {"leat", "kind", "title", "of", "vary", "series", "step"};
    if (!typed_.is_map(root) || !head(root, "ladder", ladder.title)) return;
    typed_.only_keys(root, keys);
    const YamlNode* series = root.find("series");
    if (!series) {
      one_series(root, "", ladder);
    } else {
      for (const char* key : {"of", "vary"})
        if (const YamlNode* other = root.find(key))
          fault(Code::duplicate, other->place, fmt::format("'{}' stands beside 'series'; write either of and vary, or series that each have them", key));
      several(*series, ladder);
    }
    std::size_t rungs = 0;
    for (const LadderSeries& one : ladder.series) rungs += one.vary.values.size();
    if (rungs > most_rungs) fault(Code::out_of_range, root.place, fmt::format("the ladder has {} rungs; {} are the most", rungs, most_rungs));
    if (const YamlNode* node = root.find("step")) step(*node, ladder);
  }

 private:
  void several(const YamlNode& map, LadderSpec& ladder) {
    static const std::vector<std::string> keys = {"of", "vary"};
    if (!typed_.is_map(map)) return;
    if (map.entries.empty()) fault(Code::missing_key, map.place, "no series here; write for example ammonia: {of: CASE.yaml, vary: {PATH: 1 to 5 g/L in 5 points}}");
    for (const YamlNode::Entry& entry : map.entries) {
      if (!typed_.is_map(entry.value)) continue;
      typed_.only_keys(entry.value, keys);
      one_series(entry.value, entry.key, ladder);
    }
  }

  void one_series(const YamlNode& map, const std::string& name, LadderSpec& ladder) {
    const YamlNode* of = typed_.required(map, "of");
    const YamlNode* vary = typed_.required(map, "vary");
    const auto open = of ? base_case(*of) : std::nullopt;
    if (!vary || !typed_.is_map(*vary)) return;
    if (vary->entries.size() != 1) {
      fault(Code::wrong_kind, vary->place, fmt::format("{} inputs stand here; a ladder steps one. Use a campaign for several", vary->entries.size()));
      return;
    }
    const auto input = varied(vary->entries.front(), open ? &*open : nullptr);
    if (!input || !open) return;
    opened_.push_back(*open);
    ladder.series.push_back({name.empty() ? std::filesystem::path(open->base.file).stem().string() : name, open->base, *input});
  }

  void step(const YamlNode& node, LadderSpec& ladder) {
    const auto name = typed_.text(node);
    if (!name) return;
    ladder.step = *name;
    bool beaker = opened_.empty();
    for (const OpenCase& open : opened_) {
      if (open.text.at_top("kind") != "beaker") continue;
      beaker = true;
      const std::vector<std::string> names = open.text.names_in("steps");
      if (std::find(names.begin(), names.end(), *name) != names.end()) continue;
      const std::string near = did_you_mean(*name, names);
      fault(Code::unknown_name, node.place, fmt::format("'{}' is no step of '{}'{} It has: {}", shown_text(*name), open.base.file, near.empty() ? "." : near,
                                                        names.empty() ? "no steps" : fmt::format("{}", fmt::join(names, ", "))));
    }
    if (!beaker) fault(Code::not_supported, node.place, "'step' is of beakers, and all cases here are flowsheets; leave it out");
  }

  std::vector<OpenCase> opened_;
};

}  // namespace

std::optional<LadderSpec> read_ladder(std::string_view text, const std::string& file, Diagnostics& diagnostics) {
  const auto root = read_yaml(text, file, diagnostics);
  if (!root) return std::nullopt;
  const std::size_t before = diagnostics.faults().size();
  LadderSpec ladder;
  ladder.file = file;
  ladder.text = text;
  LadderReader(file, diagnostics).read(*root, ladder);
  return diagnostics.faults().size() == before ? std::optional(std::move(ladder)) : std::nullopt;
}

std::optional<LadderSpec> ladder_of_case(std::string_view text, const std::string& file, std::string_view sentence, Diagnostics& diagnostics) {
  const auto open = CaseText::read(std::string(text), file, diagnostics);
  auto vary = read_varied(sentence, {"--vary", 0, 0, ""}, diagnostics);
  if (!open) return std::nullopt;
  const std::string kind = open->at_top("kind");
  if (kind == "ladder" || kind == "campaign") {
    diagnostics.fault(Code::unknown_name, {file, 0, 0, ""}, fmt::format("the file is a {}; --vary steps a flowsheet or a beaker. Use {} without --vary", kind, verb_for(kind)));
    return std::nullopt;
  }
  if (!vary || !open->has(vary->path, vary->place, diagnostics)) return std::nullopt;
  LadderSpec ladder;
  ladder.title = open->at_top("title");
  ladder.file = file;
  ladder.text = text;
  const std::filesystem::path path(file);
  ladder.series.push_back({path.stem().string(), {path.filename().string(), file, std::string(text), {file, 0, 0, ""}}, std::move(*vary)});
  return ladder;
}

}  // namespace leat
