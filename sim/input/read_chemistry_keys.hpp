// KeyReader: the keys that every kind of file shares: its head, the chemistry, liquors, and amounts as typed.
//   amounts:  `4 mol/L`, `0.47 %`, `600 mg/L as NaCN`, `rest`; a bare number is a fault; never negative, a share at most 100 %
//   liquors:  `water`, the name of another liquor, or a composition
//   names:    of the user's own things: no blank, '.', '/' or ':' in them
// No chemistry is done here: an amount keeps the unit it was typed in, and names of species are taken as they stand. Every
// mistake becomes a fault at its place and reading goes on, so that one pass lists them all.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "models/core/diagnostics.hpp"
#include "models/process/catalogue.hpp"
#include "sim/circuit/flowsheet.hpp"
#include "sim/input/typed_reader.hpp"
#include "sim/input/yaml_document.hpp"

namespace leat {

// What may be typed as an amount at one place.
struct AmountForm {
  std::string_view what;                // "a mass flow"
  std::string_view example;             // "100 t/h"
  std::vector<std::string_view> units;  // it converts to one of these
  bool rest = false;                    // `rest` may stand here
  bool as = false;                      // `as NaCN` may follow
};

inline const AmountForm mass_share_form{"a share of the mass", "8 % or 2.1 g/t", {"1"}, true, false};

class KeyReader {
 public:
  KeyReader(const Catalogue& catalogue, Diagnostics& diagnostics) : catalogue_(catalogue), diagnostics_(diagnostics), typed_(diagnostics) {}

  // `leat`, `kind` and `title` of a file of one kind. False, with one fault, if it is of another: then its keys mean nothing here.
  bool head(const YamlNode& root, const std::string& kind, std::string& title);

  ChemistrySpec chemistry(const YamlNode& map);
  LiquorSpec liquor(const YamlNode& node);

  std::optional<TypedAmount> amount(const YamlNode& node, const AmountForm& form);
  std::vector<NamedAmount> amounts(const YamlNode& map, const AmountForm& form);

  // A parameter of a unit or law, its unit and range checked, as typed.
  std::optional<TypedAmount> parameter(const YamlNode& node, const ParameterSpec& spec);

  // Mass shares that make a whole: at most one `rest`, without it 100 %.
  std::vector<NamedAmount> closed_shares(const YamlNode::Entry& entry);

  std::optional<double> temperature(const YamlNode& node);  // [K]
  std::vector<std::string> names(const YamlNode& node);     // a list without doubles

  // A text that must be one of the known names; "" with a fault if it is none. `what`: "a liquor".
  std::string name_among(const YamlNode& node, std::string_view what, const std::vector<std::string>& known);

  // True if the key can be a name given by the user.
  bool own_name(const YamlNode::Entry& entry);

 protected:
  void fault(Code code, const Place& place, std::string text) { diagnostics_.fault(code, place, std::move(text)); }

  // Reads a text under a key, if the key is there.
  void text_at(const YamlNode& map, std::string_view key, std::string& value);

  const Catalogue& catalogue_;
  Diagnostics& diagnostics_;
  TypedReader typed_;
  std::vector<std::string> liquor_names_;  // that may be referred to, besides `water`

 private:
  void one_share(const TypedAmount& amount, double& sum, bool& complete, int& rests);
  void contents(const YamlNode& map, LiquorSpec& liquor);
  OverrideSpec constant(const YamlNode::Entry& entry);
  bool in_form(const YamlNode& node, const Quantity& quantity, const AmountForm& form);
};

// The entry under a key of a map; null if there is none.
const YamlNode::Entry* find_entry(const YamlNode& map, std::string_view key);

// Keys of a map in the order of the file; none if it is no map or null.
std::vector<std::string> keys_of(const YamlNode* map);

// A typed text in a message: in quotes, on one line, not too long.
std::string in_quotes(std::string_view text);

// "20 1/h": a value as it is typed where `unit` is declared.
std::string example_of(std::string_view unit);

}  // namespace leat
