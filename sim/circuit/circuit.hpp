#pragma once
#include <memory>
#include <string>
#include <vector>

#include "models/core/place.hpp"
#include "models/process/pulp_layout.hpp"
#include "models/process/unit_operation.hpp"

namespace leat {

// A stream of the built circuit. Every outlet of every unit is one, every feed too.
struct CircuitStream {
  std::string name;           // L.1.pulp, lixiviant
  int source = -1;            // unit; -1: a feed
  int outlet = 0;             // of the source
  int taker = -1;             // unit; -1: leaves the circuit
  std::string leaves_as;      // name given under `leaves`
  std::vector<double> feed;   // of a feed, in PulpLayout order [mol/s]
  double temperature = 298.15;  // [K]
};

struct CircuitUnit {
  std::string name;
  std::string kind;
  std::shared_ptr<UnitOperation> operation;
  std::vector<int> takes;     // streams
  int first_stream = 0;       // its outlets are consecutive streams
  int first_state = 0;        // in the state vector; hold-up units only
  int states = 0;
  int first_ledger = 0;
  bool torn = false;          // stands for a stream of a loop without hold-up, steady only
};

// A reagent or other feed whose use is reported.
struct ReagentUse {
  std::string stream;
  std::string counted_as;     // compound
  double rate = 0;            // of that compound [kg/s]
};

// What the flowsheet means: units joined, chemistry compiled, all in SI. Immutable once built, shared by threads.
struct Circuit {
  std::string title;
  std::shared_ptr<const Chemistry> chemistry;
  std::shared_ptr<const ProcessContext> context;
  std::vector<CircuitUnit> units;
  std::vector<CircuitStream> streams;
  std::vector<int> holding;       // units with states, in calculation order
  std::vector<int> passing;       // units without, in calculation order
  std::vector<std::string> elements;      // those of the chemistry, then those only lots contain
  std::vector<double> element_mass;       // [kg/mol]
  std::vector<std::vector<double>> component_elements;  // component (water last) x element [mol/mol]
  int states = 0;
  int ledgers = 0;                // boundary flows other than streams
  std::vector<int> ledger_component;
  std::vector<int> ledger_unit;
  int pregnant_liquor = -1;       // stream
  std::vector<double> component_scale;    // typical content, water last [mol/m3]
  std::vector<double> lot_scale;          // [mol/m3]
  double flow_scale = 1;                  // typical pulp flow [m3/s]
  std::vector<double> fed_solids;         // element fed in fresh solids [mol/s]
  double dry_solids = 0;                  // fed [kg/s]
  std::vector<ReagentUse> reagents;

  int find_unit(const std::string& name) const;
  int find_stream(const std::string& name) const;
  // Content of an element in a flow or holding in PulpLayout order: liquor with formed solids, and lots apart [mol].
  double element_in_liquor(int element, std::span<const double> pulp) const;
  double element_in_lots(int element, std::span<const double> pulp) const;
};

}  // namespace leat
