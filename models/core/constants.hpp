// Physical constants in SI.
//   source: CODATA 2018 recommended values (exact since the 2019 revision of the SI); the standard atmosphere, the zero of the
//           Celsius scale and standard gravity are fixed by convention in the SI Brochure, 9th edition.
#pragma once

namespace leat {

inline constexpr double gas_constant = 8.31446261815324;    // R [J/mol/K], CODATA 2018, exact
inline constexpr double faraday = 96485.33212;              // F [C/mol], CODATA 2018, exact but cut after ten digits
inline constexpr double avogadro = 6.02214076e23;           // N_A [1/mol], SI, exact
inline constexpr double standard_atmosphere = 101325.0;     // [Pa], exact by convention
inline constexpr double zero_celsius = 273.15;              // 0 degC [K], exact by convention
inline constexpr double standard_gravity = 9.80665;         // g_n [m/s2], exact by convention
inline constexpr double reference_temperature = 298.15;     // 25 degC, where most equilibrium data are tabulated [K]

}  // namespace leat
