// What every registered rate law passes without being asked.
#include <fmt/format.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <random>

#include "tests/battery/middle.hpp"
#include "tests/support/case.hpp"

namespace leat {
namespace {

std::shared_ptr<const RateLaw> law_of(const LawKind& kind) {
  LawSettings settings;
  for (const ParameterSpec& spec : kind.parameters) settings.values[spec.name] = test::middle(spec);
  settings.orders = {{{ProbeKind::concentration, 0}, 0.5, 3.0}, {{ProbeKind::total, 1}, 1.0, 50.0}, {{ProbeKind::total, 2}, 2.0, 10.0}};
  settings.saturation_phase = 0;
  settings.needed = {{ProbeKind::total, 3}};
  return kind.make(settings);
}

template <class Check>
void for_every_law(Check&& check) {
  for (const auto& [name, kind] : test::registered().laws) {
    SCOPED_TRACE(name);
    const auto law = law_of(kind);
    EXPECT_EQ(law->name(), name);
    check(*law);
  }
}

std::vector<double> drawn_probes(const RateLaw& law, std::mt19937_64& random, double low, double high) {
  std::vector<double> values;
  for (const Probe& probe : law.probes()) {
    const double value = std::exp(std::uniform_real_distribution<double>(std::log(low), std::log(high))(random));
    values.push_back(probe.kind == ProbeKind::saturation ? std::min(value, 0.9) : value);
  }
  return values;
}

TEST(LawBattery, SpeedIsFiniteAndNeverNegative) {
  for_every_law([](const RateLaw& law) {
    std::mt19937_64 random(11);
    for (int draw = 0; draw < 500; ++draw) {
      std::vector<double> values = drawn_probes(law, random, 1e-20, 1e4), slopes(values.size());
      for (double& value : values)
        if (random() % 8 == 0) value = random() % 2 ? 0 : 1e4;  // the ends themselves
      for (double temperature : {273.15, 298.15, 373.15}) {
        const double speed = law.speed(values, temperature, slopes);
        ASSERT_TRUE(std::isfinite(speed) && speed >= 0) << speed;
        for (double slope : slopes) ASSERT_TRUE(std::isfinite(slope)) << slope;
      }
    }
  });
}

TEST(LawBattery, SlopesAgreeWithDifferences) {
  for_every_law([](const RateLaw& law) {
    std::mt19937_64 random(12);
    for (int draw = 0; draw < 200; ++draw) {
      const std::vector<double> values = drawn_probes(law, random, 1e-6, 1e4);
      std::vector<double> slopes(values.size()), unused(values.size());
      const double speed = law.speed(values, 298.15, slopes);
      for (std::size_t k = 0; k < values.size(); ++k) {
        const double h = 1e-4 * values[k];
        std::vector<double> up = values, down = values;
        up[k] += h;
        down[k] -= h;
        const double difference = (law.speed(up, 298.15, unused) - law.speed(down, 298.15, unused)) / (2 * h);
        ASSERT_NEAR(difference, slopes[k], 1e-7 * std::abs(slopes[k]) + 1e-14 * speed / h) << "probe " << k;
      }
    }
  });
}

// A law that asks for the saturation of its mineral stops there; one that asks for what it consumes stops without it.
TEST(LawBattery, StopsAtSaturationAndWithoutWhatItConsumes) {
  for_every_law([](const RateLaw& law) {
    std::mt19937_64 random(13);
    for (int draw = 0; draw < 100; ++draw)
      for (std::size_t k = 0; k < law.probes().size(); ++k) {
        std::vector<double> values = drawn_probes(law, random, 1e-6, 1e4), slopes(values.size());
        const bool saturation = law.probes()[k].kind == ProbeKind::saturation;
        values[k] = saturation ? (draw % 2 ? 1 : 1 + 0.1 * draw) : 0;
        ASSERT_EQ(law.speed(values, 298.15, slopes), 0) << "probe " << k;
      }
  });
}

// What a law cannot take up it must not be given in silence: a flowsheet that types it is refused.
TEST(LawBattery, WhatALawDoesNotReadIsRefused) {
  for (const auto& [name, kind] : test::registered().laws) {
    SCOPED_TRACE(name);
    const auto law = law_of(kind);
    const auto asks = [&](ProbeKind probe) {
      return std::any_of(law->probes().begin(), law->probes().end(), [&](const Probe& one) { return one.kind == probe; });
    };
    std::string required;
    for (const ParameterSpec& spec : kind.parameters)
      if (spec.required) required += fmt::format(", {}: {} {}", spec.name, test::middle(spec), spec.unit);
    const auto text = [&, &law_name = name](const std::string& mineral, const std::string& more) {
      return fmt::format("leat: 1\nkind: flowsheet\nsite: {{air_temperature: 25 degC}}\n"
                         "solids: {{ore: {{phases: {{{0}: 1 %, quartz: rest}}, inert: [quartz]}}}}\nleaching: {{{0}: {{law: {1}{2}{3}}}}}\n"
                         "streams: {{feed: {{solids: ore, liquor: {{NaCl: 1 g/L, NH3: 1 mol/L, O2: 1 mg/L}}, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}}}}\n"
                         "circuit: {{U: {{unit: tank, volume: 1 m3, takes: feed, temperature: 25 degC}}}}\nleaves: {{out: U}}\npregnant_liquor: out\n",
                         mineral, law_name, required, more);
    };
    EXPECT_EQ(test::faults_of(text("halite", "")), "");
    if (!asks(ProbeKind::saturation)) {
      EXPECT_NE(test::faults_of(text("halite", ", to: saturation")), "") << "takes to: saturation and ignores it";
    }
    if (!asks(ProbeKind::total)) {
      EXPECT_NE(test::faults_of(text("halite", ", at: {Cl: 1 mol/L}, orders: {Cl: 1}")), "") << "takes orders and ignores them";
      EXPECT_NE(test::faults_of(text("copper", ", oxidant: O2")), "") << "consumes an oxidant and cannot stop when there is none";
    }
  }
}

TEST(LawBattery, ParametersOutOfRangeAreRefused) {
  for (const auto& [name, kind] : test::registered().laws)
    for (const ParameterSpec& spec : kind.parameters) {
      if (spec.name == "at_temperature") continue;  // typed under `at`
      SCOPED_TRACE(name + " " + spec.name);
      const auto text = [&, &law_name = name, &law_kind = kind](double value) {
        std::string made = "leat: 1\nkind: flowsheet\nsite: {air_temperature: 25 degC}\nsolids: {ore: {phases: {halite: 1 %, quartz: rest}, inert: [quartz]}}\n";
        made += fmt::format("leaching: {{halite: {{law: {}, at: {{temperature: 25 degC}}", law_name);
        for (const ParameterSpec& one : law_kind.parameters)
          if (one.name == spec.name || (one.required && one.name != spec.name))
            made += fmt::format(", {}: {:.12g} {}", one.name, one.name == spec.name ? value : test::middle(one), one.unit);
        return made + "}}\nstreams: {feed: {solids: ore, liquor: water, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}}\n"
                      "circuit: {U: {unit: tank, volume: 1 m3, takes: feed, temperature: 25 degC}}\nleaves: {out: U}\npregnant_liquor: out\n";
      };
      ASSERT_TRUE(std::isfinite(spec.least));
      EXPECT_EQ(test::faults_of(text(test::middle(spec))), "");
      const double below = spec.least > 0 ? spec.least * 0.99 : spec.least - 1;
      for (double value : {below, spec.most * 1.01}) {
        if (!std::isfinite(value)) continue;
        EXPECT_NE(test::faults_of(text(value)).find("halite." + spec.name), std::string::npos) << value;
      }
    }
}

}  // namespace
}  // namespace leat
