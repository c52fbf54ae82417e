// FlowsheetReader: the sections of a flowsheet. Used by the read_flowsheet files alone, one file for each group of sections:
//   read_flowsheet_materials.cpp   liquors, solids, reagents, streams
//   read_flowsheet_leaching.cpp    leaching
//   read_flowsheet_circuit.cpp     circuit
//   read_flowsheet.cpp             all others
#pragma once

#include <string>
#include <utility>
#include <vector>

#include "sim/input/read_chemistry_keys.hpp"

namespace leat {

// A law that nothing is needed for: the mineral or part does not dissolve.
inline constexpr const char* inert_law = "inert";

class FlowsheetReader : public KeyReader {
 public:
  FlowsheetReader(const Catalogue& catalogue, Diagnostics& diagnostics) : KeyReader(catalogue, diagnostics) {}

  void read(const YamlNode& root, Flowsheet& flowsheet);

 private:
  using Takes = std::vector<std::pair<std::string, Place>>;

  void site(const YamlNode& map);
  void leaves(const YamlNode& map);
  HistorySpec history(const YamlNode& map);
  void start(const YamlNode& node, HistorySpec& history);

  // Materials. The liquor names are known before any other section is read.
  void liquors(const YamlNode& map);
  SolidsSpec solids(const YamlNode::Entry& entry);
  void moisture(const YamlNode& map, SolidsSpec& solids);
  void gangue(const YamlNode& map, SolidsSpec& solids);
  ReagentSpec reagent(const YamlNode::Entry& entry);
  StreamSpec stream(const YamlNode::Entry& entry);
  void solids_stream(const YamlNode& map, StreamSpec& stream);
  void feed_pulp(const YamlNode& map, StreamSpec& stream);
  void rate(const YamlNode& map, const AmountForm& form, StreamSpec& stream);

  // Leaching.
  LeachingSpec leaching(const YamlNode::Entry& entry);
  void parts(const YamlNode::Entry& entry, LeachingSpec& leaching);
  PartSpec part(const YamlNode::Entry& entry, const LeachingSpec& leaching);
  std::string law_name(const YamlNode& node);
  bool knows_law(const std::string& law) const;
  std::vector<std::string> law_keys(const std::string& law) const;
  void law(const YamlNode& map, const std::string& as, LawSpec& law);
  void reference(const YamlNode& map, LawSpec& law);
  void orders(const YamlNode::Entry& entry, LawSpec& law);
  void check_law(const LawSpec& law, const std::string& name);
  const ParameterSpec* law_parameter(const std::string& law, const std::string& name) const;

  // Circuit.
  UnitSpec unit(const YamlNode::Entry& entry);
  std::vector<std::string> unit_keys(const UnitKind& kind, const UnitExpansion* expansion) const;
  void members(const YamlNode& map, const UnitExpansion& expansion, UnitSpec& unit);
  void parameters(const YamlNode& map, const UnitKind& kind, UnitSpec& unit);
  GasSpec gas(const YamlNode& map);
  void outlets(const YamlNode& map, const std::vector<std::string>& keys, UnitSpec& unit);
  void close_outlets(const UnitSpec& unit);
  Takes takes(const YamlNode& node);

  Flowsheet* flowsheet_ = nullptr;            // being filled
  std::vector<std::string> solids_names_, reagent_names_, gas_names_, stream_names_;
};

}  // namespace leat
