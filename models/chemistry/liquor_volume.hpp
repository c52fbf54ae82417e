#pragma once
#include <span>
#include <string>
#include <vector>

#include "models/chemistry/species_library.hpp"

namespace leat {

// Volume of a liquor from its composition.
//   V = (N_w - n_OH) v_w(T) + n_OH phi_OH + n_NH4 (phi_NH4 - phi_NH3) + sum_j phi_j(W, T) N_j
// The conventional ionic apparent volumes phi (V(H+) = 0) come from the apparent specific volumes of salts of
// Laliberte and Cooper, J. Chem. Eng. Data 49 (2004) 1141, at the mass fraction W of all solutes, so that a liquor
// of one such salt has exactly that correlation's density; n_OH is the smooth negative part of the H total
// and n_NH4 the smaller of its positive part and the ammonia. Bisulfate and bicarbonate are not told from their ions: up to
// 3 % at 20 % sulfuric acid.
// Water: Kell, J. Chem. Eng. Data 20 (1975) 97. Departure: ionic additivity instead of the mixing of salts.
class LiquorVolume {
 public:
  LiquorVolume() = default;
  // component_names and masses: water last. If `one_kg_water_per_litre`, V is a litre per kg of water (for checks
  // against problems published in mol/L); nothing defaults to that.
  LiquorVolume(const SpeciesLibrary& library, const std::vector<std::string>& component_names,
               const std::vector<double>& component_mass, int hydrogen, bool one_kg_water_per_litre);

  // Volume [m3] of the amounts [mol], water last, at temperature [K]; homogeneous of degree one. dV/dN [m3/mol] goes
  // to `gradient` unless that is empty.
  double volume(double temperature, std::span<const double> amounts, std::span<double> gradient) const;

  const std::vector<std::string>& without_volume() const { return without_volume_; }  // components with no data

 private:
  struct Salt {
    double c[5];
    double molar_mass;                            // [kg/mol]
    std::vector<std::pair<int, double>> others;   // components subtracted, with their multiples
    int component = 0;                            // whose volume it gives; hydroxide is component_count
    double multiple = 1;                          // of that component in the salt
  };
  std::vector<Salt> salts_;          // in an order in which each needs only earlier ones
  std::vector<double> fixed_;        // volumes that do not come from a salt [m3/mol]
  std::vector<double> mass_;         // [kg/mol], water last
  std::vector<std::string> without_volume_;
  int hydrogen_ = -1;
  int ammonium_ = -1, ammonia_ = -1;  // slot of what ammonia changes when it binds a proton; component
  bool one_kg_water_per_litre_ = false;
};

// Density of water, Kell 1975 [kg/m3], temperature [K].
double water_density(double temperature);

}  // namespace leat
