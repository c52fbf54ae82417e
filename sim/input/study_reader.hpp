// study_reader: what ladder and campaign files share: base cases, varied inputs, their paths.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "sim/input/case_text.hpp"
#include "sim/input/typed_reader.hpp"
#include "sim/input/yaml_document.hpp"
#include "sim/study/study_spec.hpp"

namespace leat {

inline constexpr long most_points = 10000;          // of one varied input
inline constexpr std::size_t most_cases = 1000000;  // of a campaign, and rows of its table of cases

// A base case with its text taken apart.
struct OpenCase {
  BaseCase base;
  CaseText text;
};

class StudyReader {
 public:
  StudyReader(const std::string& file, Diagnostics& diagnostics) : file_(file), diagnostics_(diagnostics), typed_(diagnostics) {}

 protected:
  void fault(Code code, const Place& place, std::string text) { diagnostics_.fault(code, place, std::move(text)); }

  // `leat`, `kind` and `title`. False if the file is of another kind; the fault then says which verb reads it.
  bool head(const YamlNode& root, const std::string& kind, std::string& title);

  // A case file, by a name from the folder of the study file. A fault where it stands if it is missing, no YAML or no case.
  std::optional<OpenCase> base_case(const YamlNode& node);
  std::string beside(const std::string& name) const;  // path of a file named in the study file

  // `PATH: sentence or list` of a map, its path checked against the case if there is one.
  std::optional<VariedInput> varied(const YamlNode::Entry& entry, const OpenCase* open);

  const std::string& file_;
  Diagnostics& diagnostics_;
  TypedReader typed_;
};

// The values of a sentence or, of a list, one by one; faults at `place`. Path and place are left to the caller.
std::optional<VariedInput> read_sentence(std::string_view sentence, const Place& place, Diagnostics& diagnostics);
std::optional<VariedInput> read_value_list(const YamlNode& list, Diagnostics& diagnostics);

// A file's whole text; "why not" if it cannot be read.
std::optional<std::string> whole_text(const std::string& path, std::string& why);

}  // namespace leat
