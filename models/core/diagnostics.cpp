#include "models/core/diagnostics.hpp"

#include <algorithm>
#include <array>
#include <utility>

#include "models/core/check.hpp"

namespace leat {
namespace {

constexpr std::array<CodeEntry, 17> entries = {{
    {Code::bad_yaml, "bad_yaml", "The file cannot be read, or its text leaves the part of YAML that is read here."},
    {Code::unknown_key, "unknown_key", "A key has no meaning at this place."},
    {Code::missing_key, "missing_key", "A key that is needed at this place is not there."},
    {Code::wrong_kind, "wrong_kind", "A value is of another kind than asked for, such as a list in place of a number."},
    {Code::bad_quantity, "bad_quantity", "A value cannot be read as a number with a unit."},
    {Code::wrong_unit, "wrong_unit", "A unit measures something else than the value asked for."},
    {Code::out_of_range, "out_of_range", "A value lies outside the range in which it has a meaning."},
    {Code::unknown_name, "unknown_name", "A name refers to nothing that is known."},
    {Code::duplicate, "duplicate", "A key or name is given twice."},
    {Code::does_not_close, "does_not_close", "Parts that must add up to a whole do not."},
    {Code::does_not_balance, "does_not_balance", "A reaction creates or destroys an element or charge."},
    {Code::not_connected, "not_connected", "A unit or port of the circuit leads nowhere or is fed by nothing."},
    {Code::no_law, "no_law", "A reaction or mineral has no rate law or equilibrium that describes it."},
    {Code::no_oxidant, "no_oxidant", "A mineral needs an oxidant that nothing in the circuit supplies."},
    {Code::no_hold_up, "no_hold_up", "A vessel that must hold pulp has neither a volume nor a residence time."},
    {Code::not_supported, "not_supported", "What is asked for is understood but cannot be calculated."},
    {Code::bad_data, "bad_data", "A data file lacks a source or contradicts itself."},
}};

const CodeEntry& entry_of(Code code) {
  const auto index = static_cast<std::size_t>(code);
  check(index < entries.size() && entries[index].code == code, "the table of codes does not follow the enum");
  return entries[index];
}

std::vector<Diagnostic> by_place(std::vector<Diagnostic> list) {
  std::stable_sort(list.begin(), list.end(),
                   [](const Diagnostic& a, const Diagnostic& b) {
                     if (a.place.file != b.place.file) return a.place.file < b.place.file;
                     if (a.place.line != b.place.line) return a.place.line < b.place.line;
                     return a.place.column < b.place.column;
                   });
  return list;
}

}  // namespace

std::span<const CodeEntry> code_table() { return entries; }
std::string_view code_name(Code code) { return entry_of(code).name; }
std::string_view code_meaning(Code code) { return entry_of(code).meaning; }

std::string to_string(const Diagnostic& diagnostic) {
  const std::string where = to_string(diagnostic.place);
  return where.empty() ? diagnostic.text : where + ": " + diagnostic.text;
}

void Diagnostics::fault(Code code, Place place, std::string text) {
  faults_.push_back({code, std::move(place), std::move(text)});
}

void Diagnostics::caution(Code code, Place place, std::string text) {
  cautions_.push_back({code, std::move(place), std::move(text)});
}

std::vector<Diagnostic> Diagnostics::sorted_faults() const {
  // The same thing found twice, by two readers or in a liquor used twice, is told once.
  std::vector<Diagnostic> told;
  for (const Diagnostic& fault : by_place(faults_)) {
    const bool known = std::any_of(told.begin(), told.end(), [&](const Diagnostic& one) {
      return one.place.file == fault.place.file && one.place.line == fault.place.line && one.place.column == fault.place.column && one.text == fault.text;
    });
    if (!known) told.push_back(fault);
  }
  return told;
}
std::vector<Diagnostic> Diagnostics::sorted_cautions() const { return by_place(cautions_); }

void Diagnostics::add(const Diagnostics& other) {
  const std::vector<Diagnostic> faults = other.faults_;  // copies: other may be this collection
  const std::vector<Diagnostic> cautions = other.cautions_;
  faults_.insert(faults_.end(), faults.begin(), faults.end());
  cautions_.insert(cautions_.end(), cautions.begin(), cautions.end());
}

}  // namespace leat
