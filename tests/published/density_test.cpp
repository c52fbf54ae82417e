// Volume of liquors: water after Kell, salts after Laliberte and Cooper, and what the volume function promises.
#include <random>
#include <string_view>

#include "models/core/constants.hpp"
#include "tests/support/expect.hpp"
#include "tests/support/problem.hpp"

namespace leat::test {
namespace {

std::shared_ptr<const Chemistry> liquor_of(const std::vector<std::string>& components) {
  ChemistryRequest request;
  request.components = components;
  request.activity = ideal_activity();
  Diagnostics diagnostics;
  auto chemistry = compile_chemistry(embedded_library(), request, {}, diagnostics);
  EXPECT_TRUE(diagnostics.ok());
  return chemistry;
}

const std::vector<std::string> everything = {"Ag^+", "Cu^2+", "Zn^2+", "Pb^2+", "Fe^2+", "Fe^3+", "Ca^2+", "Mg^2+", "Na^+",
                                             "K^+",  "NH3",   "Cl^-",  "CN^-",  "SO4^2-", "NO3^-", "CO3^2-", "O2"};

// A solution of compounds given in kilograms, with its water [kg]; density [kg/m3].
double density(double celsius, const std::vector<std::pair<std::string, double>>& compounds, double water) {
  static const auto chemistry = liquor_of(everything);
  std::vector<double> amounts(chemistry->component_names.size(), 0.0);
  amounts.back() = water / chemistry->component_mass.back();
  double mass = water;
  for (const auto& [name, kilograms] : compounds) {
    ComponentAmounts parts;
    double molar_mass = 0;
    std::string fault;
    EXPECT_TRUE(components_of(embedded_library(), name, parts, molar_mass, fault)) << fault;
    for (const auto& [component, count] : parts.amounts)
      amounts[chemistry->find_component(component)] += count * kilograms / molar_mass;
    mass += kilograms;
  }
  return mass / chemistry->liquor_volume.volume(celsius + zero_celsius, amounts, {});
}

// Kell, J. Chem. Eng. Data 20 (1975) 97. Expected: the open textbook table of Chemistry 2e, appendix Water Properties (997.048 at
// 25 degC); tolerance 0.04 kg/m3, how far equation and table are apart from 0 to 100 degC.
TEST(kell_1975, density_of_water) {
  EXPECT_NEAR(water_density(298.15), 997.048, 0.04);
  EXPECT_NEAR(water_density(298.15), 997.045, 0.001);  // the equation itself at 25 degC
  EXPECT_NEAR(density(25, {}, 1), 997.045, 0.02);      // and of a liquor that is only water: its dissociation by smoothing
  double before = water_density(277.13);               // densest near 4 degC, then ever lighter
  for (double kelvin = 278.15; kelvin < 373.2; kelvin += 5) {
    EXPECT_LT(water_density(kelvin), before);
    before = water_density(kelvin);
  }
}

// Laliberte and Cooper, J. Chem. Eng. Data 49 (2004) 1141: the correlation written out, with the constants as published.
double laliberte_cooper(double celsius, double fraction, const double (&c)[5]) {
  const double water = 1 - fraction;
  const double apparent = (fraction + c[2] + c[3] * celsius) / ((c[0] * fraction + c[1]) * std::exp(1e-6 * std::pow(celsius + c[4], 2)));
  return 1 / (water / water_density(celsius + zero_celsius) + fraction * apparent);
}

struct PublishedSalt {
  const char* name;
  double c[5];
  double to;  // range compared with a measured table [kg/kg]
};
const PublishedSalt published[] = {
    {"NaCl", {-0.00433, 0.06471, 1.0166, 0.014624, 3315.6}, 0.26},
    {"CaCl2", {-0.63254, 0.93995, 4.2785, 0.048319, 3180.9}, 0.40},
    {"Na2SO4", {-1.2095e-07, 4.3474e-07, 0.15364, 0.0072514, 4731.5}, 0.20},
    {"NaOH", {385.55, 753.47, -0.10938, 0.0006953, 542.88}, 0.40},
    {"NH3", {0.12693, 0.1047, 1.0302, -0.0050803, -2973.7}, 0.294},
    {"HCl", {-80.061, 255.42, 118.42, 1.0164, 2619.5}, 0.40},
    {"NH4Cl", {6.5615, 89.772, 4.9024, -0.016574, -2089.3}, 0.25},  // ammonia that binds a proton
};

// A liquor of one salt has the density of the correlation. Tolerance 2e-5: the smooth switch between acid and hydroxide counts
// 5e-4 mol/kg of hydroxide in a neutral liquor.
void expect_the_correlation(bool hydroxide) {
  for (const PublishedSalt& salt : published)
    for (double celsius : {20.0, 25.0, 40.0})
      for (double share : {0.05, 0.25, 0.5, 0.75, 1.0}) {
        if ((std::string_view(salt.name) == "NaOH") != hydroxide) continue;
        const double fraction = share * salt.to * 0.999;
        EXPECT_RELATIVE(density(celsius, {{salt.name, fraction}}, 1 - fraction), laliberte_cooper(celsius, fraction, salt.c), 2e-5)
            << salt.name << " " << fraction << " at " << celsius;
      }
}

TEST(laliberte_cooper_2004, one_salt_has_the_density_of_the_correlation) { expect_the_correlation(false); }
// A salt whose ions take their volumes from other salts: ammonium sulfate, from NH4Cl and Na2SO4. Tolerance 1 %: ionic additivity.
TEST(laliberte_cooper_2004, ammonium_sulfate_follows_from_its_ions) {
  const double c[5] = {-123.22, 452.59, 3.2898, 0.016292, 1692.4};
  for (double fraction : {0.05, 0.10, 0.20}) EXPECT_RELATIVE(density(20, {{"(NH4)2SO4", fraction}}, 1 - fraction), laliberte_cooper(20, fraction, c), 0.01) << fraction;
}

TEST(laliberte_cooper_2004, sodium_hydroxide_has_the_density_of_the_correlation) { expect_the_correlation(true); }

// Handbook table of sodium chloride at 20 degC, figures from memory; 24 percent is 283 g/L, a leach brine. Tolerance 1 kg/m3: the
// correlation follows the table within 0.7 kg/m3 from 1 to 26 percent.
TEST(handbook_tables, sodium_chloride_at_20_degc) {
  const double salt[][2] = {{0.01, 1005.3}, {0.10, 1070.7}, {0.20, 1147.8}, {0.24, 1180.4}, {0.26, 1197.2}};  // kg/kg, kg/m3
  for (const auto& [fraction, expected] : salt) EXPECT_NEAR(density(20, {{"NaCl", fraction}}, 1 - fraction), expected, 1) << fraction;
}

std::vector<double> random_liquor(const Chemistry& chemistry, std::mt19937_64& random) {
  std::uniform_real_distribution<double> unit(0, 1);
  std::vector<double> amounts;
  for (int j = 0; j < chemistry.component_count(); ++j) amounts.push_back(std::exp(std::log(1e-6) + unit(random) * std::log(5e5)));
  if (unit(random) < 0.5) amounts[chemistry.hydrogen] *= -1;
  amounts.push_back(20 + 60 * unit(random));
  return amounts;
}

// Euler: a volume of degree one is the sum of its partial volumes. Tolerance 1e-12, rounding.
TEST(liquor_volume, is_homogeneous_of_degree_one) {
  const auto chemistry = liquor_of(everything);
  std::mt19937_64 random(11);
  for (int turn = 0; turn < 2000; ++turn) {
    const std::vector<double> amounts = random_liquor(*chemistry, random);
    const double kelvin = 273.15 + (turn % 90);
    std::vector<double> gradient(amounts.size());
    const double volume = chemistry->liquor_volume.volume(kelvin, amounts, gradient);
    ASSERT_GT(volume, 0);
    double sum = 0;
    for (std::size_t j = 0; j < amounts.size(); ++j) sum += amounts[j] * gradient[j];
    EXPECT_RELATIVE(sum, volume, 1e-12) << turn;
    for (double factor : {1e-6, 3.0, 1e6}) {
      std::vector<double> scaled = amounts;
      for (double& amount : scaled) amount *= factor;
      EXPECT_RELATIVE(chemistry->liquor_volume.volume(kelvin, scaled, {}), factor * volume, 1e-12);
    }
  }
}

// Four-point central differences. Tolerance 1e-8 of the partial volume and what rounding does to the difference.
TEST(liquor_volume, has_the_gradient_it_says) {
  const auto chemistry = liquor_of(everything);
  std::mt19937_64 random(12);
  for (int turn = 0; turn < 200; ++turn) {
    const std::vector<double> amounts = random_liquor(*chemistry, random);
    std::vector<double> gradient(amounts.size());
    const LiquorVolume& liquor = chemistry->liquor_volume;
    const double volume = liquor.volume(310, amounts, gradient);
    double solutes = 0, all = 0;
    for (std::size_t j = 0; j < amounts.size(); ++j) {
      const double mass = chemistry->component_mass[j] * amounts[j];
      all += mass;
      if (j + 1 < amounts.size()) solutes += mass;
    }
    if (std::abs(solutes / all - 0.4) < 0.01) continue;  // where the correlation is held the slope has a step
    for (std::size_t j = 0; j < amounts.size(); ++j) {
      // The switch between acid and hydroxide bends over 1e-3 mol per kilogram of water.
      const double step = static_cast<int>(j) == chemistry->hydrogen ? 2e-6 : 1e-3 * std::abs(amounts[j]) + 1e-6;
      const auto moved = [&](double by) {
        std::vector<double> other = amounts;
        other[j] += by;
        return liquor.volume(310, other, {});
      };
      const double difference = (8 * (moved(step) - moved(-step)) - (moved(2 * step) - moved(-2 * step))) / (12 * step);
      EXPECT_NEAR(difference, gradient[j], 1e-8 * std::abs(gradient[j]) + 8 * 2.2e-16 * volume / step)
          << chemistry->component_names[j] << " in liquor " << turn;
    }
  }
}

// A litre per kilogram of water where a problem published in mol/L asks for it, with its gradient.
TEST(liquor_volume, one_litre_per_kilogram_when_asked) {
  Problem problem;
  const Answer answer = problem.feed("NaCl", 3).solve();
  std::vector<double> gradient(answer.totals.size());
  EXPECT_DOUBLE_EQ(answer.chemistry->liquor_volume.volume(298.15, answer.totals, gradient), answer.water() * answer.chemistry->component_mass.back() / 1000);
  EXPECT_EQ(gradient[0], 0);
  EXPECT_DOUBLE_EQ(gradient.back(), answer.chemistry->component_mass.back() / 1000);
}

}  // namespace
}  // namespace leat::test
