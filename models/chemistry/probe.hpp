#pragma once
#include <string>

namespace leat {

// What a rate law or a vessel may ask of a solved cell, besides its state.
enum class ProbeKind {
  molality,         // of species `index` [mol/kg]
  concentration,    // of species `index` [mol/m3 of liquor]
  total,            // dissolved total of component `index` [mol/m3 of liquor]
  saturation,       // Omega of phase `index`, per one formula unit [1]
  formed,           // amount of phase `index` [mol]
  liquor_volume,    // [m3]
  formed_volume,    // of all formed solids [m3]
  formed_mass,      // of all formed solids [kg]
};

struct Probe {
  ProbeKind kind = ProbeKind::molality;
  int index = 0;
  bool operator==(const Probe&) const = default;
};

}  // namespace leat
