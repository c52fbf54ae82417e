// What every registered unit operation and rate law passes without being asked, and a model of each kind that the register
// does not know, run through the whole of sim.
#include <fmt/format.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <random>

#include "tests/support/case.hpp"
#include "tests/support/expect.hpp"

namespace leat {
namespace {

constexpr int draws = 20;

// Two metals, oxygen, a salt, a locked part and sand: lots that move electrons, protons and water, and lots that stay.
constexpr const char* ore_case = R"(leat: 1
kind: flowsheet
site: {air_temperature: 25 degC}
chemistry: {families: [ammine, chloro, hydroxo, carbonato, carbamato], activity: ideal, may_form: [malachite, calcite, chlorargyrite]}
solids:
  ore:
    phases: {copper: 1 %, malachite: 2 %, chlorargyrite: 0.5 %, halite: 1 %, quartz: rest}
    inert: [quartz]
leaching:
  copper: {law: first_order, constant: 1 1/h, oxidant: O2, at: {NH3: 1 mol/L}, orders: {NH3: 0.5}, ultimate_extraction: 80 %}
  malachite: {law: first_order, constant: 1 1/h}
  chlorargyrite: {law: first_order, constant: 1 1/h, to: saturation}
  halite: {law: at_once}
streams:
  feed: {solids: ore, liquor: {NH3: 3 mol/L, (NH4)2CO3: 0.5 mol/L, CaCl2: 1 mmol/L}, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}
  air: {gas: air}
circuit: {L: {unit: tank, volume: 5 m3, temperature: 25 degC, takes: feed, gas: {takes: air, kla: 10 1/h}}}
leaves: {out: L}
pregnant_liquor: out
)";

const Circuit& circuit() {
  static const test::Case made = test::build(ore_case);
  return *made.built.steady;
}
const ProcessContext& context() { return *circuit().context; }

double middle(const ParameterSpec& spec) {
  if (spec.otherwise && !spec.required) return *spec.otherwise;
  if (spec.least > 0 && std::isfinite(spec.most)) return std::sqrt(spec.least * spec.most);
  return std::isfinite(spec.least) && std::isfinite(spec.most) ? (spec.least + spec.most) / 2 : 1;
}

// One unit and numbers to feed it with.
class Bench {
 public:
  Bench(const UnitKind& kind, bool all_parameters, bool volume_flows, unsigned seed) : random_(seed) {
    const Chemistry& c = *context().chemistry;
    settings_.name = "U";
    for (const ParameterSpec& spec : kind.parameters)
      if (spec.required || spec.otherwise || all_parameters) settings_.values[spec.name] = middle(spec);
    if (kind.takes_gas) settings_.gases.push_back({"O2", c.find_species("O2"), c.find_component("O2"), 1e-3, 0.25});
    if (kind.named_outlets) {
      settings_.outlets = {{"a", 0.2, 0, false}, {"b", 0.3, 0, false}, {"onward", 0, 0, true}};
      if (volume_flows) settings_.outlets[1].volume_flow = 0.01;
    }
    unit = kind.make(settings_, context());
  }

  // A liquor that can exist, with lots [mol, mol/s].
  std::vector<double> pulp() {
    const Chemistry& c = *context().chemistry;
    const PulpLayout& layout = context().layout;
    std::vector<double> out(layout.size());
    double charge = 0;
    for (int j = 0; j < layout.components; ++j) {
      out[j] = between(1e-3, 1e2);
      if (j != c.hydrogen) charge += c.component_charge[j] * out[j];
    }
    out[c.hydrogen] = -charge;
    out[layout.water()] = between(5e3, 5e4);
    for (int k = 0; k < layout.lots; ++k) out[layout.lot(k)] = between(1e-3, 1e2);
    return out;
  }
  double between(double low, double high) { return std::exp(std::uniform_real_distribution<double>(std::log(low), std::log(high))(random_)); }

  void draw() {
    const UnitTraits& traits = unit->traits();
    const PulpLayout& layout = context().layout;
    inlet = pulp();
    state.clear();
    if (traits.hold_up) {
      state = pulp();
      for (std::size_t k = 0; k < traits.state_names.size(); ++k) state.push_back(between(1e-4, 1e-2));
    }
    probes.clear();
    // Volumes and formed amounts are small against the pulp, so that nothing is split beyond what there is.
    for (const Probe& probe : traits.probes) probes.push_back(probe.kind == ProbeKind::liquor_volume ? between(0.1, 1) : between(1e-4, 1e-2));
    speeds.assign(layout.lots, 0.0);
    if (traits.dissolves)
      for (int k = 0; k < layout.lots; ++k)
        if (context().lots[k].law) speeds[k] = between(1e-6, 1e-2);
    gradient.assign(layout.components + 1, 0.0);
    for (double& one : gradient) one = between(1e-6, 1e-4);
  }

  // state, inlet, probes, speeds in one row; rates, outlets, ledger in one row.
  std::vector<double> row() const {
    std::vector<double> all;
    for (const auto* part : {&state, &inlet, &probes, &speeds}) all.insert(all.end(), part->begin(), part->end());
    return all;
  }
  template <class Real>
  std::vector<Real> evaluate(const std::vector<Real>& in) const {
    const UnitTraits& traits = unit->traits();
    const std::size_t ns = state.size(), w = inlet.size(), np = probes.size(), no = traits.outlets.size() * w, nl = traits.ledger.size();
    std::vector<Real> out(ns + no + nl, Real(std::nan("")));
    const std::span<const Real> from(in);
    const std::span<Real> to(out);
    const UnitView<Real> view{from.subspan(0, ns), from.subspan(ns, w), from.subspan(ns + w, np), from.subspan(ns + w + np), gradient};
    UnitAnswer<Real> answer{to.subspan(0, ns), to.subspan(ns, no), to.subspan(ns + no, nl)};
    unit->evaluate(view, answer);
    return out;
  }

  std::unique_ptr<UnitOperation> unit;
  std::vector<double> state, inlet, probes, speeds, gradient;

 private:
  UnitSettings settings_;
  std::mt19937_64 random_;
};

template <class Check>
void for_every_unit(Check&& check) {
  for (const auto& [name, kind] : test::registered().units)
    for (bool all : {false, true})
      for (bool flows : {false, true}) {
        if (flows && !kind.named_outlets) continue;
        SCOPED_TRACE(fmt::format("{}{}{}", name, all ? ", every parameter given" : "", flows ? ", an outlet by volume flow" : ""));
        Bench bench(kind, all, flows, 20260101);
        for (int draw = 0; draw < draws; ++draw) {
          bench.draw();
          check(bench);
          if (::testing::Test::HasFailure()) return;
        }
      }
}

// Amount and absolute amount of a conserved quantity in a pulp: element e, or charge for e = -1.
struct Sum {
  double value = 0, size = 0;
  void add(int e, std::span<const double> pulp, double sign) {
    const PulpLayout& layout = context().layout;
    for (int j = 0; j <= layout.components; ++j) add(e, j, pulp[j], sign);
    if (e < 0) return;
    for (int k = 0; k < layout.lots; ++k) put(context().lots[k].elements[e] * pulp[layout.lot(k)] * sign);
  }
  void add(int e, int component, double amount, double sign) {
    const double per = e >= 0 ? circuit().component_elements[component][e] : context().chemistry->component_charge[component];
    put(per * amount * sign);
  }
  void put(double x) {
    value += x;
    size += std::abs(x);
  }
};

TEST(UnitBattery, EveryValueIsWrittenAndFinite) {
  for_every_unit([](Bench& bench) {
    for (double value : bench.evaluate(bench.row())) ASSERT_TRUE(std::isfinite(value));
  });
}

TEST(UnitBattery, ElementsAndChargeBalance) {
  for_every_unit([](Bench& bench) {
    const UnitTraits& traits = bench.unit->traits();
    const std::vector<double> out = bench.evaluate(bench.row());
    const std::span<const double> all(out);
    const std::size_t ns = bench.state.size(), w = bench.inlet.size();
    for (int e = -1; e < static_cast<int>(circuit().elements.size()); ++e) {
      Sum sum;
      sum.add(e, bench.inlet, 1);
      if (traits.hold_up) sum.add(e, all.first(w), -1);
      for (std::size_t o = 0; o < traits.outlets.size(); ++o) sum.add(e, all.subspan(ns + o * w, w), -1);
      for (std::size_t g = 0; g < traits.ledger.size(); ++g)
        sum.add(e, context().chemistry->find_component(traits.ledger[g]), all[ns + traits.outlets.size() * w + g], 1);
      // The products of a lot balance to the round-off of its reaction's coefficients.
      ASSERT_NEAR(sum.value, 0, 1e-12 * sum.size) << (e < 0 ? "charge" : circuit().elements[e]);
    }
  });
}

TEST(UnitBattery, DualNumbersAgreeWithDifferences) {
  for_every_unit([](Bench& bench) {
    const std::vector<double> x = bench.row();
    std::vector<Dual> dual(x.begin(), x.end());
    const std::vector<double> plain = bench.evaluate(x);
    for (std::size_t c = 0; c < x.size(); ++c) {
      dual[c].slope[3] = 1;
      const std::vector<Dual> slopes = bench.evaluate(dual);
      dual[c].slope[3] = 0;
      const double h = 1e-5 * std::max(std::abs(x[c]), 1e-12);
      std::vector<double> up = x, down = x;
      up[c] += h;
      down[c] -= h;
      const std::vector<double> high = bench.evaluate(up), low = bench.evaluate(down);
      for (std::size_t r = 0; r < slopes.size(); ++r) {
        ASSERT_EQ(slopes[r].value, plain[r]) << "the value itself, row " << r;
        const double difference = (high[r] - low[r]) / (2 * h), size = std::abs(slopes[r].slope[3]);
        // A difference keeps 1e-9 of the slope, and the round-off of the values over the step.
        ASSERT_NEAR(difference, slopes[r].slope[3], 1e-7 * size + 4e-16 * (std::abs(high[r]) + std::abs(plain[r])) * 50 / h)
            << "row " << r << " column " << c;
      }
    }
  });
}

// A unit without hold-up has no size: twice the flow in is twice the flow out. A typed volume flow is a size.
TEST(UnitBattery, PassingUnitsScaleWithTheirFlow) {
  for (const auto& [name, kind] : test::registered().units) {
    SCOPED_TRACE(name);
    Bench bench(kind, true, false, 7);
    if (bench.unit->traits().hold_up) continue;
    for (int draw = 0; draw < draws; ++draw) {
      bench.draw();
      const std::vector<double> once = bench.evaluate(bench.row());
      for (double& one : bench.inlet) one *= 2;
      for (std::size_t p = 0; p < bench.probes.size(); ++p) {
        const ProbeKind probe = bench.unit->traits().probes[p].kind;
        if (probe == ProbeKind::formed || probe == ProbeKind::liquor_volume || probe == ProbeKind::formed_volume || probe == ProbeKind::formed_mass)
          bench.probes[p] *= 2;
      }
      const std::vector<double> twice = bench.evaluate(bench.row());
      for (std::size_t r = 0; r < once.size(); ++r) ASSERT_NEAR(twice[r], 2 * once[r], 1e-13 * std::abs(twice[r])) << "row " << r;
    }
  }
}

// What makes recycles explicit: the outlet of a vessel follows its contents alone.
TEST(UnitBattery, OutletsOfAVesselDoNotDependOnItsInlet) {
  for_every_unit([](Bench& bench) {
    if (!bench.unit->traits().hold_up) return;
    const std::size_t ns = bench.state.size(), count = bench.unit->traits().outlets.size() * bench.inlet.size();
    const std::vector<double> before = bench.evaluate(bench.row());
    bench.inlet = bench.pulp();
    const std::vector<double> after = bench.evaluate(bench.row());
    for (std::size_t r = 0; r < count; ++r) ASSERT_EQ(before[ns + r], after[ns + r]);
  });
}

// A filled vessel has every state, its contents those of its volume.
TEST(UnitBattery, FillingSetsEveryState) {
  for_every_unit([](Bench& bench) {
    const UnitTraits& traits = bench.unit->traits();
    if (!traits.hold_up) return;
    const std::vector<double> per_volume = bench.pulp(), filled = bench.unit->filled_with(per_volume, 0.01);
    ASSERT_EQ(filled.size(), per_volume.size() + traits.state_names.size());
    ASSERT_EQ(traits.state_scales.size(), traits.state_names.size());
    for (std::size_t k = 0; k < per_volume.size(); ++k)
      ASSERT_NEAR(filled[k], per_volume[k] * bench.unit->live_volume(), 1e-12 * std::abs(filled[k]));
    for (double one : filled) ASSERT_TRUE(std::isfinite(one));
  });
}

// A value outside a parameter's range, typed in a flowsheet, is refused at its place; one inside is not.
TEST(UnitBattery, ParametersOutOfRangeAreRefused) {
  const auto typed = [](const ParameterSpec& spec, double value) {
    return spec.unit == "1" ? fmt::format("{:.12g} %", 100 * value) : fmt::format("{:.12g} {}", value, spec.unit);
  };
  for (const auto& [name, kind] : test::registered().units) {
    const auto text = [&, &unit_name = name, &unit_kind = kind](const std::string& wrong, double value) {
      std::string made = "leat: 1\nkind: flowsheet\nsite: {air_temperature: 25 degC}\nstreams: {feed: {liquor: water, rate: 1 m3/h}}\n";
      made += fmt::format("circuit: {{U: {{unit: {}, takes: feed, temperature: 25 degC", unit_name);
      for (const ParameterSpec& spec : unit_kind.parameters)
        if (spec.required || spec.name == wrong) made += fmt::format(", {}: {}", spec.name, typed(spec, spec.name == wrong ? value : middle(spec)));
      if (unit_kind.named_outlets) made += ", onward: rest";
      return made + "}}\nleaves: {out: U}\npregnant_liquor: out\n";
    };
    for (const ParameterSpec& spec : kind.parameters) {
      SCOPED_TRACE(name + " " + spec.name);
      ASSERT_TRUE(std::isfinite(spec.least)) << "no lower end";
      EXPECT_EQ(test::faults_of(text(spec.name, middle(spec))).find("U." + spec.name), std::string::npos);
      const double below = spec.least > 0 ? spec.least * 0.99 : spec.least - 1;
      for (double value : {below, spec.most * 1.01}) {
        if (!std::isfinite(value)) continue;
        EXPECT_NE(test::faults_of(text(spec.name, value)).find("U." + spec.name), std::string::npos) << value;
      }
    }
  }
}

// --- laws

std::shared_ptr<const RateLaw> law_of(const LawKind& kind) {
  LawSettings settings;
  for (const ParameterSpec& spec : kind.parameters) settings.values[spec.name] = middle(spec);
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
      if (spec.required) required += fmt::format(", {}: {} {}", spec.name, middle(spec), spec.unit);
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
            made += fmt::format(", {}: {:.12g} {}", one.name, one.name == spec.name ? value : middle(one), one.unit);
        return made + "}}\nstreams: {feed: {solids: ore, liquor: water, solids_fraction: 30 %, rate: 1 t/h, rate_basis: dry}}\n"
                      "circuit: {U: {unit: tank, volume: 1 m3, takes: feed, temperature: 25 degC}}\nleaves: {out: U}\npregnant_liquor: out\n";
      };
      ASSERT_TRUE(std::isfinite(spec.least));
      EXPECT_EQ(test::faults_of(text(middle(spec))), "");
      const double below = spec.least > 0 ? spec.least * 0.99 : spec.least - 1;
      for (double value : {below, spec.most * 1.01}) {
        if (!std::isfinite(value)) continue;
        EXPECT_NE(test::faults_of(text(value)).find("halite." + spec.name), std::string::npos) << value;
      }
    }
}

// --- models the register does not know

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
