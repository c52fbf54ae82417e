// A model of each kind that the register does not know, run through the whole of sim.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "tests/support/case.hpp"
#include "tests/support/expect.hpp"

namespace leat {
namespace {

// Every ion's activity coefficient is one constant.
class ConstantActivity final : public ActivityModel {
 public:
  static constexpr double ln_gamma = -0.25;
  std::string_view name() const override { return "constant"; }
  std::string_view source() const override { return "a test"; }
  std::vector<ActivityArgument> arguments(std::span<const ActivitySpecies> species) const override {
    ActivityArgument ionic{"ionic strength", {}};
    for (const ActivitySpecies& one : species) ionic.coefficient.push_back(one.charge * one.charge / 2);
    return {ionic};
  }
  void evaluate(std::span<const ActivitySpecies> species, const ActivityConditions&, std::span<const double>, ActivityValues& out) const override {
    for (std::size_t i = 0; i < species.size(); ++i) out.ln_gamma[i] = species[i].charge != 0 ? ln_gamma : 0;
    std::fill(out.dln_gamma.begin(), out.dln_gamma.end(), 0.0);
    std::fill(out.dln_water.begin(), out.dln_water.end(), 0.0);
    out.ln_water = 0;
  }
  double largest_ionic_strength() const override { return 100; }
};

// Speed by how much sodium there is: g = k c / (c + half).
class SodiumLaw final : public RateLaw {
 public:
  SodiumLaw(double constant, double half, Probe sodium) : constant_(constant), half_(half), probes_{sodium} {}
  std::string_view name() const override { return "by_sodium"; }
  std::span<const Probe> probes() const override { return probes_; }
  double speed(std::span<const double> values, double, std::span<double> slopes) const override {
    const double c = std::max(values[0], 0.0);
    slopes[0] = constant_ * half_ / ((c + half_) * (c + half_));
    return constant_ * c / (c + half_);
  }

 private:
  double constant_, half_;
  std::vector<Probe> probes_;
};

// A vessel from which everything leaves with one time constant, and whose lots dissolve.
class Bucket final : public UnitOperationOf<Bucket> {
 public:
  Bucket(double residence, double volume, double temperature, const ProcessContext& context)
      : context_(&context), residence_(residence), volume_(volume) {
    temperature_ = temperature;
    traits_.outlets = {"spill"};
    traits_.hold_up = traits_.dissolves = true;
    traits_.probes = {{ProbeKind::liquor_volume, 0}};
  }
  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
    const PulpLayout& layout = context_->layout;
    for (int k = 0; k < layout.size(); ++k) {
      out.outlets[k] = in.state[k] / Real(residence_);
      out.rates[k] = in.inlet[k] - out.outlets[k];
    }
    for (int k = 0; k < layout.lots; ++k) {
      const Real dissolved = in.speeds[k] * in.state[layout.lot(k)];
      out.rates[layout.lot(k)] -= dissolved;
      for (int j = 0; j <= layout.components; ++j) out.rates[j] += Real(context_->lots[k].products[j]) * dissolved;
    }
  }
  std::vector<double> filled_with(std::span<const double> per_volume, double) const override {
    std::vector<double> state(per_volume.begin(), per_volume.end());
    for (double& one : state) one *= volume_;
    return state;
  }
  double live_volume() const override { return volume_; }

 private:
  const ProcessContext* context_;
  double residence_, volume_;
};

Catalogue with_toys() {
  Catalogue catalogue = test::registered();
  catalogue.activity["constant"] = [] { return std::make_shared<ConstantActivity>(); };
  LawKind law;
  law.name = "by_sodium";
  law.parameters = {{"constant", "1/s", true, {}, 0, 1, "speed in much sodium", ""}, {"half", "mol/m3", true, {}, 1e-6, 1e6, "sodium at half of it", ""}};
  law.make = [](const LawSettings& s) {
    return std::make_shared<SodiumLaw>(s.values.at("constant"), s.values.at("half"), s.orders.at(0).probe);
  };
  catalogue.laws[law.name] = law;
  UnitKind unit;
  unit.name = "bucket";
  unit.parameters = {{"residence", "s", true, {}, 1, 1e6, "time constant", ""}, {"volume", "m3", false, 1.0, 1e-3, 1e3, "for scales", ""}};
  unit.needs_temperature = true;
  unit.make = [](const UnitSettings& s, const ProcessContext& context) {
    return std::make_unique<Bucket>(s.values.at("residence"), s.values.at("volume"), s.temperature, context);
  };
  catalogue.units[unit.name] = unit;
  catalogue.expansions["buckets"] = {"buckets", "buckets in a row", "bucket", "number"};
  return catalogue;
}

TEST(Toys, RunThroughTheWholeOfSim) {
  const Catalogue catalogue = with_toys();
  const RunResult r = test::run(R"(leat: 1
kind: flowsheet
site: {air_temperature: 25 degC}
chemistry:
  activity: constant
  density: one_kg_water_per_litre
  may_form: []
  only: [OH^-, chlorargyrite, zincite]
solids: {ore: {phases: {chlorargyrite: 1 %, zincite: 1 g/t, gangue: rest}, inert: [gangue], gangue_density: 2.7 t/m3}}
leaching:
  chlorargyrite: {law: first_order, constant: 1000 1/h, to: saturation}
  zincite: {law: by_sodium, constant: 0.5 1/h, half: 0.3 mol/L, orders: {Na: 1}, at: {Na: 1 mol/L}}
streams: {feed: {solids: ore, liquor: {NaCl: 0.1 mol/L}, solids_fraction: 20 %, rate: 1 t/h, rate_basis: dry}}
circuit:
  B: {unit: buckets, number: 2, residence: 3 h, temperature: 25 degC, takes: feed}
  T: {unit: thickener, takes: B, solids_fraction: 50 %}
leaves: {over: T.overflow, under: T.underflow}
pregnant_liquor: over
history: {start: {all: {NaCl: 0.1 mol/L}}, until: 80 h, every: 20 h}
)",
                                {}, catalogue);
  ASSERT_TRUE(r.steady_ok);
  // The law: half-saturated in sodium; 1/(1 + g t) of the lot stays in a bucket, 1/(1 + g t)^2 in two.
  const double g = 0.5 * 0.1 / (0.1 + 0.3);
  EXPECT_RELATIVE(test::unit(r, r.steady, "B.1").clock_speed[test::lot_of(r, "zincite")] * 3600, g, 1e-6);
  EXPECT_RELATIVE(1 - test::extraction(r, r.steady, "Zn"), std::pow(1 + 3 * g, -2), 1e-6);
  // The activity model: the solubility of silver chloride rises by exp(0.5).
  const UnitSnapshot& second = test::unit(r, r.steady, "B.2");
  const Chemistry& c = *r.circuit->chemistry;
  EXPECT_NEAR(second.saturation_index[c.find_phase("chlorargyrite")], 0, 1e-3);
  EXPECT_RELATIVE(second.molality[c.find_species("Ag^+")] * second.molality[c.find_species("Cl^-")],
                  std::exp(0.5) * std::pow(10, -9.75 + second.saturation_index[c.find_phase("chlorargyrite")]), 1e-9);
  // The unit: what it holds is three hours of what leaves it; and a long time is the steady state.
  EXPECT_RELATIVE(second.lots[test::lot_of(r, "gangue")], 3 * 3600 * test::lot_flow(r, r.steady, "B.2", "gangue"), 1e-12);
  ASSERT_TRUE(r.time_ok);
  EXPECT_RELATIVE(test::extraction(r, r.history.back(), "Zn"), test::extraction(r, r.steady, "Zn"), 1e-6);
  EXPECT_EQ(r.circuit->chemistry->activity->name(), "constant");
}

}  // namespace
}  // namespace leat
