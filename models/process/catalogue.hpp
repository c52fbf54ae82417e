#pragma once
#include <functional>
#include <limits>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "models/chemistry/activity_model.hpp"
#include "models/chemistry/rate_law.hpp"
#include "models/process/unit_operation.hpp"

namespace leat {

// One parameter of a unit or law, declared once: it drives the reader, the range check and the reference page.
struct ParameterSpec {
  std::string name;
  std::string unit;                     // SI, or "1"
  bool required = false;
  std::optional<double> otherwise;      // value when not given; none: there is no default
  double least = -std::numeric_limits<double>::infinity();
  double most = std::numeric_limits<double>::infinity();
  std::string meaning;
  std::string source;                   // of the default or the form; empty where the user must know
};

// A gas in contact with the liquor through a stated transfer coefficient.
struct GasContact {
  std::string component;         // dissolved form, e.g. O2
  int species = -1;              // its index
  int component_index = -1;
  double transfer = 0;           // kla [1/s]
  double at_equilibrium = 0;     // concentration with the gas [mol/m3]
};

// A share of an inlet or a volume flow that leaves by a named outlet.
struct OutletShare {
  std::string name;
  double share = 0;              // [1]
  double volume_flow = 0;        // [m3/s], used if positive
  bool rest = false;
};

// What a unit is made from once everything is in SI and names are indices.
struct UnitSettings {
  std::string name;
  std::map<std::string, double> values;      // by parameter, SI
  std::vector<GasContact> gases;
  std::vector<OutletShare> outlets;
  double temperature = 298.15;               // [K]
  bool steady = false;                       // for a steady solve: a surge keeps its volume
};

struct UnitKind {
  std::string name;
  std::string summary;
  std::vector<ParameterSpec> parameters;
  bool takes_gas = false;
  bool named_outlets = false;                // outlets are named by the user
  bool needs_temperature = false;
  std::function<std::unique_ptr<UnitOperation>(const UnitSettings&, const ProcessContext&)> make;
};

// Order of a law in a named species or total, against the value where the constant was measured.
struct RateOrder {
  Probe probe;
  double order = 0;
  double at = 1;  // in the unit of the probe
};

struct LawSettings {
  std::map<std::string, double> values;   // by parameter, SI
  std::vector<RateOrder> orders;
  int saturation_phase = -1;              // Omega of which phase slows the law; -1: none
  std::vector<Probe> needed;              // dissolved totals consumed: the law stops where one of them is used up
};

struct LawKind {
  std::string name;
  std::string summary;
  std::vector<ParameterSpec> parameters;
  bool takes_orders = true;               // may have orders in the liquor and reference conditions
  std::function<std::shared_ptr<const RateLaw>(const LawSettings&)> make;
};

// Shorthand that stands for several units in a row: `L` of three tanks becomes L.1, L.2, L.3.
struct UnitExpansion {
  std::string name;
  std::string summary;
  std::string unit;            // kind each member has
  std::string count;           // parameter that says how many
};

// Everything the register knows, by name; handed down so that the machine never names a model.
struct Catalogue {
  std::map<std::string, std::function<std::shared_ptr<const ActivityModel>()>> activity;
  std::map<std::string, UnitKind> units;
  std::map<std::string, UnitExpansion> expansions;
  std::map<std::string, LawKind> laws;
};

}  // namespace leat
