#pragma once
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "models/core/place.hpp"
#include "models/core/quantity.hpp"

namespace leat {

// What the file said, each value with its place. Nothing that needs chemistry is converted yet: a typed mol/L stays a
// number per litre until the whole composition, and so the density, is known.

struct TypedAmount {
  Quantity quantity;  // as typed
  std::string as;     // `600 mg/L as NaCN`: the compound it is counted as; empty: the thing itself
  bool rest = false;  // `rest`
  Place place;
};

struct NamedAmount {
  std::string name;   // compound, ion or total
  TypedAmount amount;
};

struct LiquorSpec {
  std::vector<NamedAmount> contents;
  std::string balance_with;            // ion that closes the charge
  std::optional<double> ph;
  std::optional<double> temperature;   // [K] at which volumes are meant
  std::string named;                   // of another liquor (liquors.X), instead of contents
  bool water = false;                  // plain water
  Place place;
};

struct OverrideSpec {
  std::string name;
  std::optional<double> log10_beta, log10_solubility, log10_k;
  std::optional<double> temperature;   // [K]
  std::optional<double> enthalpy;      // [J/mol]
  std::string reaction;                // for a species or solid the library has not
  std::string source, note;
  Place place;
};

struct ChemistrySpec {
  std::vector<std::string> families, may_form, forms_slowly, only;
  std::map<std::string, Place> places;   // where each name of those lists stands
  std::string activity = "davies";
  Place activity_place;
  bool may_form_given = false;
  bool one_kg_water_per_litre = false;
  double debye_huckel_a = 0;
  std::vector<OverrideSpec> constants;
  Place place;
};

struct SolidPhaseSpec {
  std::string mineral;
  TypedAmount share;   // of the dry mass, or `rest`
};

struct SolidsSpec {
  std::string name;
  std::vector<SolidPhaseSpec> phases;
  std::vector<std::string> inert;
  double moisture = 0;                 // of the wet mass [kg/kg]
  LiquorSpec moisture_liquor;
  double gangue_density = 0;           // of the phase `gangue` [kg/m3]
  Place place, moisture_place;
};

struct LawSpec {
  std::string law;                               // empty: inherits that of the mineral
  std::map<std::string, TypedAmount> parameters; // as typed, by name
  std::string to;                                // saturation or empty
  std::optional<double> ultimate_extraction;     // [1]
  std::map<std::string, TypedAmount> at;         // reference conditions
  std::vector<std::pair<std::string, double>> orders;
  Place place, orders_place;
};

struct PartSpec {
  std::string name;
  double share = 0;  // of the mineral [1]
  LawSpec law;
  Place place;
};

struct LeachingSpec {
  std::string mineral;
  LawSpec law;
  std::vector<PartSpec> parts;
  std::string oxidant, reductant, reaction;
  Place place, oxidant_place;
};

struct ReagentSpec {
  std::string name;
  std::vector<NamedAmount> made_of;  // mass shares
  std::string counted_as;
  Place place;
};

struct StreamSpec {
  std::string name;
  std::optional<LiquorSpec> liquor;
  std::string solids;
  std::string reagent;
  TypedAmount rate;
  bool rate_dry = false;                   // the rate counts dry solids
  std::optional<double> solids_fraction;   // of the feed pulp [kg/kg]; its water is `liquor`
  std::optional<double> temperature;       // [K]
  bool gas = false;                        // `gas: air`
  Place place;
};

struct GasSpec {
  std::string takes;      // air
  double transfer = 0;    // kla [1/s]
  Place place;
};

struct OutletSpec {
  std::string name;
  TypedAmount share;
};

struct UnitSpec {
  std::string name;
  std::string kind;
  std::vector<std::pair<std::string, Place>> takes;
  std::map<std::string, TypedAmount> parameters;
  std::optional<double> temperature;       // [K]
  std::optional<GasSpec> gas;
  std::vector<OutletSpec> outlets;         // of a splitter
  int count = 1;                           // of an expansion
  std::map<int, std::vector<std::pair<std::string, Place>>> member_takes;  // extra streams of single members, from 1
  Place place, kind_place;
};

struct LeavesSpec {
  std::string name;
  std::string stream;
  Place place;
};

struct FillingSpec {
  std::string unit;     // unit, or train; `all` for every vessel
  LiquorSpec liquor;
};

struct HistorySpec {
  bool from_steady = false;
  std::vector<FillingSpec> fillings;
  double until = 0;     // [s]
  double every = 3600;  // [s]
  Place place;
};

struct Flowsheet {
  std::string file, text, title;
  double altitude = 0;                       // [m]
  std::optional<double> air_temperature;     // [K]
  ChemistrySpec chemistry;
  std::map<std::string, LiquorSpec> liquors;
  std::vector<SolidsSpec> solids;
  std::vector<LeachingSpec> leaching;
  std::vector<ReagentSpec> reagents;
  std::vector<StreamSpec> streams;
  std::vector<UnitSpec> units;
  std::vector<LeavesSpec> leaves;
  std::string pregnant_liquor;
  std::vector<std::string> metals;           // whose recovery is reported; empty: every metal fed
  Place metals_place;
  Place pregnant_place, place;
  std::optional<HistorySpec> history;
};

struct StepSpec {
  std::string name;
  std::vector<NamedAmount> add;              // compounds by mol, g, or volume for water and liquors
  std::vector<NamedAmount> as;               // strength in which the added compound comes
  std::optional<double> until_ph;
  std::string with;                          // compound dosed until then
  bool filter_off = false;
  std::optional<double> heat_to;             // [K]
  Place place;
};

struct BeakerSpec {
  std::string file, text, title;
  ChemistrySpec chemistry;
  LiquorSpec liquor;
  double volume = 1e-3;                      // [m3]
  std::vector<NamedAmount> add;
  double temperature = 298.15;               // [K]
  std::optional<double> held_ph;             // bare, by exchange of protons
  std::map<std::string, std::pair<double, Place>> gases;  // held partial pressures [Pa]
  std::vector<StepSpec> steps;
  Place place;
};

}  // namespace leat
