#include "models/chemistry/liquor_volume.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <string_view>

#include "models/core/constants.hpp"

namespace leat {
namespace {

constexpr int most_components = 64;

// Which salt gives the volume of which ion, in an order in which every other ion of the salt is already known.
struct IonFromSalt {
  const char* ion;
  const char* salt;
  std::array<std::pair<const char*, double>, 2> others;
  double multiple;
};
constexpr std::array<IonFromSalt, 16> ion_from_salt = {{
    {"Cl^-", "HCl", {}, 1},
    {"Na^+", "NaCl", {{{"Cl^-", 1}}}, 1},
    {"K^+", "KCl", {{{"Cl^-", 1}}}, 1},
    {"Ca^2+", "CaCl2", {{{"Cl^-", 2}}}, 1},
    {"Mg^2+", "MgCl2", {{{"Cl^-", 2}}}, 1},
    {"Zn^2+", "ZnCl2", {{{"Cl^-", 2}}}, 1},
    {"Cu^2+", "CuCl2", {{{"Cl^-", 2}}}, 1},
    {"Fe^2+", "FeCl2", {{{"Cl^-", 2}}}, 1},
    {"Fe^3+", "FeCl3", {{{"Cl^-", 3}}}, 1},
    {"Ni^2+", "NiCl2", {{{"Cl^-", 2}}}, 1},
    {"Cd^2+", "CdCl2", {{{"Cl^-", 2}}}, 1},
    {"SO4^2-", "Na2SO4", {{{"Na^+", 2}}}, 1},
    {"NO3^-", "NaNO3", {{{"Na^+", 1}}}, 1},
    {"CO3^2-", "Na2CO3", {{{"Na^+", 2}}}, 1},
    {"OH^-", "NaOH", {{{"Na^+", 1}}}, 1},
    {"NH3", "NH3", {}, 1},
}};

// What a proton changes when ammonia binds it: phi(NH4+) - phi(NH3), from NH4Cl.
constexpr IonFromSalt ammonium_from_salt = {"NH4^+", "NH4Cl", {{{"Cl^-", 1}, {"NH3", 1}}}, 1};

constexpr double largest_solute_fraction = 0.4;  // the correlation is held there beyond [kg/kg]

}  // namespace

double water_density(double temperature) {
  const double t = temperature - zero_celsius;
  return (999.83952 + t * (16.945176 + t * (-7.9870401e-3 + t * (-46.170461e-6 + t * (105.56302e-9 - t * 280.54253e-12))))) /
         (1 + 16.87985e-3 * t);
}

LiquorVolume::LiquorVolume(const SpeciesLibrary& library, const std::vector<std::string>& component_names,
                           const std::vector<double>& component_mass, int hydrogen, bool one_kg_water_per_litre)
    : mass_(component_mass), hydrogen_(hydrogen), one_kg_water_per_litre_(one_kg_water_per_litre) {
  const int n = static_cast<int>(component_names.size()) - 1;
  // Slots: components, then ions that are needed on the way (Cl for Na ...) although the case has none, hydroxide last.
  std::vector<std::string> slots(component_names.begin(), component_names.begin() + n);
  slots.push_back("OH^-");
  const auto slot = [&](const std::string& name) {
    const auto found = std::find(slots.begin(), slots.end(), name);
    if (found != slots.end()) return static_cast<int>(found - slots.begin());
    slots.push_back(name);
    return static_cast<int>(slots.size()) - 1;
  };
  fixed_.assign(most_components, 0.0);
  std::vector<bool> known(most_components, false);
  if (hydrogen >= 0) known[hydrogen] = true;
  std::vector<IonFromSalt> rules(ion_from_salt.begin(), ion_from_salt.end());
  const auto ammonia = std::find(component_names.begin(), component_names.end(), "NH3");
  if (ammonia != component_names.end()) rules.push_back(ammonium_from_salt);
  for (const IonFromSalt& rule : rules) {
    const auto salt = std::find_if(library.density_salts.begin(), library.density_salts.end(),
                                   [&](const DensitySalt& one) { return one.name == rule.salt; });
    if (salt == library.density_salts.end()) continue;
    Salt row;
    std::copy(std::begin(salt->c), std::end(salt->c), row.c);
    row.molar_mass = library.molar_mass(salt->formula);
    row.multiple = rule.multiple;
    for (const auto& [ion, multiple] : rule.others)
      if (ion) row.others.emplace_back(slot(ion), multiple);
    row.component = slot(rule.ion);
    known[row.component] = true;
    salts_.push_back(row);
    if (std::string_view(rule.ion) == "NH4^+") {
      ammonium_ = row.component;
      ammonia_ = static_cast<int>(ammonia - component_names.begin());
    }
  }
  for (int j = 0; j < n; ++j) {
    if (known[j]) continue;
    const auto volume = library.ionic_volumes.find(component_names[j]);
    if (volume != library.ionic_volumes.end())
      fixed_[j] = volume->second;
    else
      without_volume_.push_back(component_names[j]);
  }
}

double LiquorVolume::volume(double temperature, std::span<const double> amounts, std::span<double> gradient) const {
  const int n = static_cast<int>(amounts.size()) - 1;
  if (one_kg_water_per_litre_) {
    if (!gradient.empty()) {
      std::fill(gradient.begin(), gradient.end(), 0.0);
      gradient[n] = mass_[n] / 1000.0;
    }
    return mass_[n] * amounts[n] / 1000.0;
  }
  // Smooth negative part of the H total: hydroxide, homogeneous of degree one with the water.
  const double width = 1e-3 * mass_[n] * amounts[n];
  const double h = hydrogen_ >= 0 ? amounts[hydrogen_] : 0;
  const double root = std::sqrt(h * h + width * width);
  const double hydroxide = 0.5 * (root - h);
  const double dhydroxide_dh = 0.5 * (h / root - 1);
  const double dhydroxide_dw = 0.5 * (width / root) * 1e-3 * mass_[n];

  double solutes = 0, total = mass_[n] * amounts[n];
  for (int j = 0; j < n; ++j) solutes += mass_[j] * amounts[j];
  total += solutes;
  // Hydroxide took its oxygen from the water: sodium hydroxide counts whole among the solutes.
  solutes += hydroxide * mass_[n];
  double fraction = solutes / total;
  const bool held = fraction > largest_solute_fraction || fraction < 0;
  fraction = std::clamp(fraction, 0.0, largest_solute_fraction);

  std::array<double, most_components> phi{}, dphi{};
  std::copy(fixed_.begin(), fixed_.end(), phi.begin());
  const double t = temperature - zero_celsius;
  for (const Salt& salt : salts_) {
    const double spread = std::exp(1e-6 * (t + salt.c[4]) * (t + salt.c[4]));
    const double below = (salt.c[0] * fraction + salt.c[1]) * spread;
    const double above = fraction + salt.c[2] + salt.c[3] * t;
    double value = salt.molar_mass * above / below;
    double slope = salt.molar_mass * (1 / below - above * salt.c[0] * spread / (below * below));
    for (const auto& [other, multiple] : salt.others) {
      value -= multiple * phi[other];
      slope -= multiple * dphi[other];
    }
    phi[salt.component] = value / salt.multiple;
    dphi[salt.component] = slope / salt.multiple;
  }
  const double water_volume = mass_[n] / water_density(temperature);
  const int oh = n;
  double volume = (amounts[n] - hydroxide) * water_volume + hydroxide * phi[oh];
  double dvolume_dfraction = hydroxide * dphi[oh];
  for (int j = 0; j < n; ++j) {
    if (j == hydrogen_) continue;
    volume += phi[j] * amounts[j];
    dvolume_dfraction += dphi[j] * amounts[j];
  }
  // Ammonium: the smaller of acid and ammonia, smoothed.
  double bound = 0, dbound_dacid = 0, dbound_dammonia = 0, dbound_dw = 0;
  if (ammonium_ >= 0) {
    const double acid = hydroxide + h, base = amounts[ammonia_];  // smooth positive part of the H total
    const double gap = std::sqrt((acid - base) * (acid - base) + width * width);
    bound = 0.5 * (acid + base - gap);
    dbound_dacid = 0.5 * (1 - (acid - base) / gap);
    dbound_dammonia = 0.5 * (1 + (acid - base) / gap);
    dbound_dw = -0.5 * (width / gap) * 1e-3 * mass_[n];
    volume += bound * phi[ammonium_];
    dvolume_dfraction += bound * dphi[ammonium_];
  }
  if (held) dvolume_dfraction = 0;
  if (!gradient.empty()) {
    for (int j = 0; j < n; ++j)
      gradient[j] = (j == hydrogen_ ? (phi[oh] - water_volume) * dhydroxide_dh : phi[j]) +
                    dvolume_dfraction * (mass_[j] * (1 - fraction) + (j == hydrogen_ ? mass_[n] * dhydroxide_dh : 0)) / total;
    gradient[n] = water_volume + (phi[oh] - water_volume) * dhydroxide_dw +
                  dvolume_dfraction * (mass_[n] * dhydroxide_dw - fraction * mass_[n]) / total;
    if (ammonium_ >= 0) {
      gradient[hydrogen_] += phi[ammonium_] * dbound_dacid * (1 + dhydroxide_dh);
      gradient[ammonia_] += phi[ammonium_] * dbound_dammonia;
      gradient[n] += phi[ammonium_] * (dbound_dacid * dhydroxide_dw + dbound_dw);
    }
  }
  return volume;
}

}  // namespace leat
