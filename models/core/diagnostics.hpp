// Diagnostics: faults and cautions found in an input, collected as values so that one pass reports them all.
//   fault:    the input cannot be used; nothing is calculated
//   caution:  the input can be used, but the user should know
// Nothing here prints or throws for a user's mistake.
#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "models/core/place.hpp"

namespace leat {

// The kinds of fault. Each has a short name and a one-sentence meaning in the table of diagnostics.cpp.
enum class Code {
  bad_yaml,
  unknown_key,
  missing_key,
  wrong_kind,
  bad_quantity,
  wrong_unit,
  out_of_range,
  unknown_name,
  duplicate,
  does_not_close,
  does_not_balance,
  not_connected,
  no_law,
  no_oxidant,
  no_hold_up,
  not_supported,
  bad_data,
};

// One row of the table of codes.
struct CodeEntry {
  Code code;
  std::string_view name;     // same word as in the enum
  std::string_view meaning;  // one sentence for the reader of a report
};

std::span<const CodeEntry> code_table();      // every code once, in the order of the enum
std::string_view code_name(Code code);        // "wrong_unit"
std::string_view code_meaning(Code code);     // "A unit measures something else than the value asked for."

struct Diagnostic {
  Code code = Code::bad_data;
  Place place;
  std::string text;  // what is wrong, the value, what is allowed
};

// "tank.yaml:14:21 circuit.L1.residence_time: 6 kg is not a time; write for example 6 h"
std::string to_string(const Diagnostic& diagnostic);

class Diagnostics {
 public:
  void fault(Code code, Place place, std::string text);
  void caution(Code code, Place place, std::string text);

  bool ok() const { return faults_.empty(); }  // no fault so far; cautions do not count
  const std::vector<Diagnostic>& faults() const { return faults_; }
  const std::vector<Diagnostic>& cautions() const { return cautions_; }

  // By place (file, line, column); faults at one place stay in the order they were found.
  std::vector<Diagnostic> sorted_faults() const;  // by place, each once
  std::vector<Diagnostic> sorted_cautions() const;

  // Adds all faults and cautions of another collection behind the own ones.
  void add(const Diagnostics& other);

 private:
  std::vector<Diagnostic> faults_;
  std::vector<Diagnostic> cautions_;
};

}  // namespace leat
