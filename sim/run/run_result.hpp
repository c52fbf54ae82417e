#pragma once
#include <memory>
#include <string>
#include <vector>

#include "sim/circuit/circuit.hpp"
#include "sim/numerics/cvode.hpp"
#include "sim/run/steady.hpp"

namespace leat {

// One vessel at one time.
struct UnitSnapshot {
  double ph = 0, ionic_strength = 0, water_activity = 1;
  double temperature = 0;                 // [K]
  double liquor_density = 0;              // [kg/m3]
  double water_per_volume = 0;            // solvent in the liquor [kg/m3]
  double pulp_volume = 0;                 // [m3]
  double outlet_flow = 0;                 // [m3/s]
  double solids_fraction = 0;             // [kg/kg]
  std::vector<double> molality;           // per species [mol/kg]
  std::vector<double> total;              // dissolved, per component without water [mol/m3]
  std::vector<double> formed;             // per phase [mol]
  std::vector<double> saturation_index;   // per phase [log10]
  std::vector<double> lots;               // retained [mol]
  std::vector<double> dissolving;         // per lot [mol/s]
  std::vector<double> clock_speed;        // per lot [1/s]
  std::vector<double> family;             // element x family, dissolved [mol/m3]
};

// One stream at one time.
struct StreamSnapshot {
  std::vector<double> flow;        // PulpLayout order [mol/s]
  std::vector<double> formed;      // per phase [mol/s]
  std::vector<double> dissolved;   // per component, water last [mol/s]
  std::vector<double> molality;    // per species; empty where nothing flows [mol/kg]
  double ph = 0, ionic_strength = 0;
  double water_per_volume = 0;     // solvent in the liquor [kg/m3]
  double liquor_volume = 0;        // [m3/s]
  double pulp_volume = 0;          // [m3/s]
  double solids = 0;               // [kg/s]
  double mass = 0;                 // [kg/s]
};

// Computed afresh from the states and flows, each with its own denominator.
struct Closures {
  double elements = 0;     // worst element but H and O [1]
  double water = 0;        // worst of H and O [1]
  double mass = 0;         // all mass [1]
  double charge = 0;       // |sum z N| / sum |z| N, worst vessel or stream [1]
  double mass_action = 0;  // worst |ln IAP - ln K| [ln]
  double cell_balance = 0; // worst component in a cell [1]
  std::string worst_element, worst_cell, worst_balance;  // element; place of mass action; place of cell balance
};

struct Snapshot {
  double time = 0;                              // [s]
  std::vector<UnitSnapshot> units;              // in the order of RunResult::vessels
  std::vector<StreamSnapshot> streams;          // in the order of the circuit
  std::vector<double> extraction_now, extraction_to_date;  // per recovered element [1]
  std::vector<double> recovery_now, recovery_to_date;      // per recovered element [1]
  std::vector<double> formed_leaving_now;                  // leaving as formed solids over fed, per recovered element [1]
  std::vector<double> recovery_by_family;       // recovered element x family [1]
  std::vector<double> recovery_by_family_to_date;
  std::vector<double> held_in_vessels;          // recovered element dissolved or formed in vessels [mol]
  std::vector<double> ledger;                   // taken up from gases [mol/s]
  Closures closures;
};

struct Caution {
  std::string kind;   // hydrogen cyanide, ammonia vapour, ...
  std::string place;  // vessel, stream or step; empty: the whole case
  std::string text;   // with the number that fired it
  double weight = 0;  // the larger the worse, among those of one kind
};

struct RunResult {
  std::shared_ptr<const Circuit> circuit;        // the steady one
  std::vector<int> vessels;                      // units with hold-up that are not torn streams
  std::vector<int> recovered;                    // elements whose recovery is reported, indices of circuit elements
  bool steady_ok = false;
  Snapshot steady;
  SteadyReport steady_report;
  bool timed = false, time_ok = false;
  bool stopped = false;                          // the history ends early because it was asked to; all of it closes
  std::vector<Snapshot> history;
  CvodeStatistics statistics;
  double time_seconds = 0;                       // [s]
  std::string failure;                           // why, with unit, equation and species; empty if all is well
  std::vector<Caution> cautions;
  std::vector<std::string> may_form, watched, at_equilibrium;
  double site_pressure = 101325;                 // [Pa]
};

}  // namespace leat
