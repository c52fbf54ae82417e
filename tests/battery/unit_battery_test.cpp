// What every registered unit operation passes without being asked.
#include <fmt/format.h>
#include <gtest/gtest.h>

#include <cmath>
#include <random>

#include "tests/battery/middle.hpp"
#include "tests/support/case.hpp"

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

// One unit and numbers to feed it with.
class Bench {
 public:
  Bench(const UnitKind& kind, bool all_parameters, bool volume_flows, unsigned seed) : random_(seed) {
    const Chemistry& c = *context().chemistry;
    settings_.name = "U";
    for (const ParameterSpec& spec : kind.parameters)
      if (spec.required || spec.otherwise || all_parameters) settings_.values[spec.name] = test::middle(spec);
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
        if (spec.required || spec.name == wrong) made += fmt::format(", {}: {}", spec.name, typed(spec, spec.name == wrong ? value : test::middle(spec)));
      if (unit_kind.named_outlets) made += ", onward: rest";
      return made + "}}\nleaves: {out: U}\npregnant_liquor: out\n";
    };
    for (const ParameterSpec& spec : kind.parameters) {
      SCOPED_TRACE(name + " " + spec.name);
      ASSERT_TRUE(std::isfinite(spec.least)) << "no lower end";
      EXPECT_EQ(test::faults_of(text(spec.name, test::middle(spec))).find("U." + spec.name), std::string::npos);
      const double below = spec.least > 0 ? spec.least * 0.99 : spec.least - 1;
      for (double value : {below, spec.most * 1.01}) {
        if (!std::isfinite(value)) continue;
        EXPECT_NE(test::faults_of(text(spec.name, value)).find("U." + spec.name), std::string::npos) << value;
      }
    }
  }
}

}  // namespace
}  // namespace leat
