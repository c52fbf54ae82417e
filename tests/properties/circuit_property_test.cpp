// What must hold for any circuit: derivatives, two roads to one answer, order and units of the file, balances counted afresh.
#include <fmt/format.h>
#include <fmt/ranges.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <cstring>
#include <random>

#include "sim/run/steady.hpp"
#include "tests/support/case.hpp"
#include "tests/support/expect.hpp"

namespace leat {
namespace {

using Entries = std::vector<std::pair<std::string, std::string>>;  // name, what stands behind it

// A circuit of tanks in a row with a thickener, in one of three flavours; its file can be written in any order and unit.
struct Plant {
  std::string chemistry, lead_liquor;
  Entries phases, leaching, streams, units;
  std::string leaves, history;
  std::vector<std::string> solids_inert;

  std::string text() const {
    const auto block = [](const char* key, const Entries& entries) {
      std::string made = fmt::format("{}:\n", key);
      for (const auto& [name, what] : entries) made += fmt::format("  {}: {}\n", name, what);
      return made;
    };
    std::string shares;
    for (const auto& [name, share] : phases) shares += fmt::format("{}{}: {}", shares.empty() ? "" : ", ", name, share);
    return "leat: 1\nkind: flowsheet\nsite: {altitude: 500 m, air_temperature: 25 degC}\n" + chemistry +
           fmt::format("solids: {{ore: {{phases: {{{}}}, inert: [{}]}}}}\n", shares, fmt::join(solids_inert, ", ")) + block("leaching", leaching) +
           block("streams", streams) + block("circuit", units) + leaves + "pregnant_liquor: pregnant\n" + history;
  }
};

enum class Unit { plant, si };  // t/h, m3, mol/L, 1/h or kg/s, L, mmol/L, 1/s

class PlantMaker {
 public:
  explicit PlantMaker(unsigned seed, Unit units = Unit::plant) : random_(seed), units_(units) {
    flavour_ = seed % 3;
    tanks_ = 1 + seed / 3 % 4;
    recycled_ = seed / 2 % 2 == 0;
  }

  Plant next() {
    Plant plant;
    if (flavour_ == 0) ammine(plant);
    if (flavour_ == 1) cyanide(plant);
    if (flavour_ == 2) chloride(plant);
    const double ore = between(1, 3), liquor = ore * between(3, 5), residence = between(1, 4);
    plant.streams.push_back({"feed", fmt::format("{{solids: ore, rate: {}, rate_basis: dry}}", mass_flow(ore))});
    plant.streams.push_back({"lixiviant", fmt::format("{{liquor: {}, rate: {}}}", plant.lead_liquor, volume_flow(liquor))});
    plant.streams.push_back({"air", "{gas: air}"});
    const std::string lead = recycled_ ? "back" : "lixiviant";
    if (recycled_)
      plant.units.push_back({"back", fmt::format("{{unit: surge, volume: {}, temperature: 28 degC, takes: [split.recycle, lixiviant]}}",
                                                 volume(liquor * residence))});
    const double tank = (liquor + ore) * (recycled_ ? 1.5 : 1) * residence;
    plant.units.push_back({"L", fmt::format("{{unit: train, tanks: {}, volume: {}, temperature: 30 degC, takes: [feed, {}], gas: {{takes: air, kla: {}}}}}", tanks_,
                                            volume(tank / tanks_), lead, per_time(5))});
    plant.units.push_back({"T", "{unit: thickener, takes: L, solids_fraction: 50 %}"});
    if (recycled_) plant.units.push_back({"split", fmt::format("{{unit: splitter, takes: T.overflow, product: {} %, recycle: rest}}", std::round(between(40, 70)))});
    plant.leaves = fmt::format("leaves: {{pregnant: {}, tails: T.underflow}}\n", recycled_ ? "split.product" : "T.overflow");
    return plant;
  }

 private:
  double between(double low, double high) { return std::round(1e4 * std::uniform_real_distribution<double>(low, high)(random_)) / 1e4; }
  std::string mass_flow(double t_h) const { return units_ == Unit::plant ? fmt::format("{} t/h", t_h) : fmt::format("{:.17g} kg/s", t_h / 3.6); }
  std::string volume_flow(double m3_h) const { return units_ == Unit::plant ? fmt::format("{} m3/h", m3_h) : fmt::format("{:.17g} L/s", m3_h / 3.6); }
  std::string volume(double m3) const { return units_ == Unit::plant ? fmt::format("{:.17g} m3", m3) : fmt::format("{:.17g} L", 1000 * m3); }
  std::string molar(double mol_l) const { return units_ == Unit::plant ? fmt::format("{} mol/L", mol_l) : fmt::format("{:.17g} mmol/L", 1000 * mol_l); }
  std::string per_time(double per_h) const { return units_ == Unit::plant ? fmt::format("{} 1/h", per_h) : fmt::format("{:.17g} 1/s", per_h / 3600); }
  std::string law(double per_h, const std::string& more) const { return fmt::format("{{law: first_order, constant: {}{}}}", per_time(per_h), more); }

  void ammine(Plant& plant) {
    plant.chemistry = "chemistry: {families: [ammine, chloro, hydroxo, sulfato, carbonato, carbamato], activity: davies,\n"
                      "            may_form: [malachite, chlorargyrite, calcite]}\n";
    plant.lead_liquor = fmt::format("{{NH3: {}, (NH4)2CO3: {}, (NH4)2SO4: {}}}", molar(between(2, 5)), molar(between(0.2, 0.6)), molar(between(0.1, 0.4)));
    plant.phases = {{"chlorargyrite", "0.3 %"}, {"copper", "0.5 %"}, {"malachite", "0.9 %"}, {"halite", "0.5 %"}, {"quartz", "rest"}};
    plant.solids_inert = {"quartz"};
    plant.leaching = {{"chlorargyrite", law(between(1, 4), ", to: saturation")},
                      {"copper", law(between(0.5, 2), fmt::format(", oxidant: O2, at: {{NH3: {}}}, orders: {{NH3: 0.5}}, ultimate_extraction: 92 %", molar(3)))},
                      {"malachite", law(between(0.5, 2), ", at: {temperature: 25 degC}, activation_energy: 30 kJ/mol")},
                      {"halite", "{law: at_once}"}};
  }
  void cyanide(Plant& plant) {
    plant.chemistry = "chemistry: {families: [cyano, hydroxo, carbonato, chloro], activity: davies, may_form: [AgCN, CuCN, calcite]}\n";
    plant.lead_liquor = fmt::format("{{NaCN: {}, NaOH: {}, Na2CO3: {}}}", molar(between(0.01, 0.04)), molar(between(0.005, 0.02)), molar(0.002));
    plant.phases = {{"gold", "3 g/t"}, {"silver", "60 g/t"}, {"quartz", "rest"}, {"chlorargyrite", "40 g/t"}};
    plant.solids_inert = {"quartz"};
    const std::string at = fmt::format(", oxidant: O2, at: {{CN^-: {}, O2: {}}}, orders: {{CN^-: 0.5, O2: 0.3}}", molar(0.01), molar(0.0002));
    const auto part = [&](int share, double per_h) { return fmt::format("{{share: {} %, law: first_order, constant: {}}}", share, per_time(per_h)); };
    plant.leaching = {{"gold", fmt::format("{{{}, parts: {{fast: {}, slow: {}, locked: {{share: 8 %, law: inert}}}}}}", at.substr(2),
                                           part(80, between(0.2, 0.6)), part(12, 0.03))},
                      {"silver", law(between(0.1, 0.3), at)},
                      {"chlorargyrite", law(between(0.5, 1), ", to: saturation")}};
  }
  void chloride(Plant& plant) {
    plant.chemistry = "chemistry: {families: [chloro, hydroxo, sulfato], activity: davies, may_form: [chlorargyrite, anglesite, gypsum]}\n";
    plant.lead_liquor = fmt::format("{{NaCl: {}, HCl: {}}}", molar(between(3, 4.5)), molar(between(0.2, 0.5)));
    plant.phases = {{"anglesite", "1.2 %"}, {"quartz", "rest"}, {"chlorargyrite", "0.2 %"}, {"zincite", "0.8 %"}};
    plant.solids_inert = {"quartz"};
    plant.leaching = {{"chlorargyrite", law(between(1, 3), ", to: saturation")},
                      {"anglesite", law(between(0.5, 2), ", to: saturation")},
                      {"zincite", law(between(1, 3), "")}};
  }

  std::mt19937_64 random_;
  Unit units_;
  int flavour_ = 0, tanks_ = 1;
  bool recycled_ = false;
};

constexpr unsigned plants = 12;  // every flavour with one to four tanks, with and without a recycle

Plant plant_of(unsigned seed, Unit units = Unit::plant) { return PlantMaker(seed, units).next(); }

// --- derivatives

struct Dense {
  int n = 0;
  std::vector<double> value;  // scaled: row by the flow of its state, column by the state
  double& at(int r, int c) { return value[static_cast<std::size_t>(c) * n + r]; }
};

Dense differences(CircuitEquations& equations, const std::vector<double>& y, const std::vector<double>& scale, double step) {
  Dense out{equations.size(), std::vector<double>(y.size() * y.size())};
  std::vector<double> high(y.size()), low(y.size());
  for (int c = 0; c < out.n; ++c) {
    const double h = step * std::max(std::abs(y[c]), 1e-3 * scale[c]);
    std::vector<double> x = y;
    x[c] = y[c] + h;
    EXPECT_TRUE(equations.rates(x, high)) << equations.complaint;
    x[c] = y[c] - h;
    EXPECT_TRUE(equations.rates(x, low)) << equations.complaint;
    for (int r = 0; r < out.n; ++r) out.at(r, c) = (high[r] - low[r]) / (2 * h) * scale[c] / scale[r] * 3600;
  }
  return out;
}

// Compares at y. `own_states` are compared too: at rest the volume gradient, which the derivative freezes, cancels.
void expect_derivatives(CircuitEquations& equations, const std::vector<double>& y, bool own_states) {
  const Circuit& circuit = equations.circuit();
  const std::vector<double> scale = state_scales(circuit);
  std::vector<double> along(equations.pattern().row.size());
  ASSERT_TRUE(equations.jacobian(y, along)) << equations.complaint;
  Dense coarse = differences(equations, y, scale, 1e-4), fine = differences(equations, y, scale, 2e-5);
  Dense exact{equations.size(), std::vector<double>(y.size() * y.size())};
  std::vector<char> inside(exact.value.size(), 0);
  for (int c = 0; c < exact.n; ++c)
    for (int k = equations.pattern().column_begin[c]; k < equations.pattern().column_begin[c + 1]; ++k) {
      const int r = equations.pattern().row[k];
      exact.at(r, c) = along[k] * scale[c] / scale[r] * 3600;
      inside[static_cast<std::size_t>(c) * exact.n + r] = 1;
    }
  int rough = 0, compared = 0;
  for (int r = 0; r < exact.n; ++r) {
    double row = 0;
    for (int c = 0; c < exact.n; ++c) row = std::max(row, std::abs(exact.at(r, c)));
    bool own = false;
    for (int u : circuit.holding) {
      const int k = r - circuit.units[u].first_state;
      own = own || (k >= circuit.context->layout.size() && k < circuit.units[u].states);
    }
    for (int c = 0; c < exact.n; ++c) {
      if (!inside[static_cast<std::size_t>(c) * exact.n + r]) {
        EXPECT_NEAR(fine.at(r, c), 0, 1e-6 * row) << "outside the pattern: " << state_name(circuit, r) << " by " << state_name(circuit, c);
        continue;
      }
      if (own && !own_states) continue;
      ++compared;
      // A difference is third order in its step, and rough where a solid appears or a law stops between its two points.
      const double error = std::abs(fine.at(r, c) - exact.at(r, c)), unsure = std::abs(fine.at(r, c) - coarse.at(r, c));
      const double allowed = 1e-5 * row + 1e-4 * std::abs(exact.at(r, c)) + unsure;
      if (unsure > 1e-2 * row + 1e-2 * std::abs(exact.at(r, c))) {
        ++rough;
        continue;
      }
      EXPECT_LE(error, allowed) << state_name(circuit, r) << " by " << state_name(circuit, c) << ": " << exact.at(r, c) << " against " << fine.at(r, c);
    }
  }
  EXPECT_LT(rough, 0.02 * compared + 1);
}

TEST(CircuitProperty, JacobianAgreesWithDifferences) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const test::Case made = test::build(plant_of(seed).text());
    CircuitEquations equations(made.built.steady);
    std::vector<double> y;
    const SteadyReport report = solve_steady(equations, y);
    ASSERT_TRUE(report.circuit.ok) << report.circuit.message;
    expect_derivatives(equations, y, true);
    // Away from rest: every state moved, hydrogen with the charge.
    const Circuit& circuit = equations.circuit();
    const Chemistry& c = *circuit.chemistry;
    std::mt19937_64 random(seed);
    std::uniform_real_distribution<double> about(0.9, 1.1);
    for (int u : circuit.holding) {
      double* state = y.data() + circuit.units[u].first_state;
      const auto charge = [&] {
        double sum = 0;
        for (int j = 0; j < c.component_count(); ++j) sum += c.component_charge[j] * state[j];
        return sum;
      };
      for (int k = 0; k < circuit.units[u].states; ++k) state[k] *= about(random);
      state[c.hydrogen] -= charge();
    }
    expect_derivatives(equations, y, false);
    if (HasFailure()) return;
  }
}

// --- comparing results

// Every flow and pH of `two` against `one`, by the names of streams, components and lots; relative to the largest flow of a kind.
void expect_same(const RunResult& one, const Snapshot& at_one, const RunResult& two, const Snapshot& at_two, double relative) {
  const Circuit &a = *one.circuit, &b = *two.circuit;
  const auto names = [](const Circuit& c) {
    std::vector<std::string> all = c.chemistry->component_names;
    for (const Lot& lot : c.context->lots) all.push_back(lot.name);
    return all;
  };
  const std::vector<std::string> mine = names(a), theirs = names(b);
  for (std::size_t k = 0; k < mine.size(); ++k) {
    const auto found = std::find(theirs.begin(), theirs.end(), mine[k]);
    ASSERT_NE(found, theirs.end()) << mine[k];
    double largest = 1e-12;
    for (const StreamSnapshot& stream : at_one.streams) largest = std::max(largest, std::abs(stream.flow[k]));
    for (std::size_t s = 0; s < at_one.streams.size(); ++s) {
      const int other = b.find_stream(a.streams[s].name);
      if (other < 0 || other >= static_cast<int>(at_two.streams.size())) continue;
      EXPECT_NEAR(at_two.streams[other].flow[found - theirs.begin()], at_one.streams[s].flow[k], relative * largest) << a.streams[s].name << ": " << mine[k];
      if (std::isfinite(at_one.streams[s].ph)) {
        EXPECT_NEAR(at_two.streams[other].ph, at_one.streams[s].ph, 1e3 * relative) << a.streams[s].name;
      }
    }
  }
  ASSERT_EQ(one.recovered.size(), two.recovered.size());
  for (std::size_t e = 0; e < one.recovered.size(); ++e) {
    const std::string& name = a.elements[one.recovered[e]];
    EXPECT_NEAR(test::extraction(two, at_two, name), at_one.extraction_now[e], relative) << name;
    EXPECT_NEAR(test::recovery(two, at_two, name), at_one.recovery_now[e], relative) << name;
  }
}

TEST(CircuitProperty, LongTimeIsTheSteadyState) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    Plant plant = plant_of(seed);
    plant.history = fmt::format("liquors: {{start: {}}}\nhistory: {{start: start, until: 400 h, every: 50 h}}\n", plant.lead_liquor);
    SCOPED_TRACE(fmt::format("plant {}", seed));
    RunOptions options;
    options.relative_tolerance = 1e-8;
    const RunResult r = test::run(plant.text(), options);
    ASSERT_TRUE(r.steady_ok && r.time_ok);
    expect_same(r, r.steady, r, r.history.back(), 1e-6);
    if (HasFailure()) return;
  }
}

// What has crossed the boundary is integrated with the states by the same linear formulas, so that a balance over time is an
// identity whatever the error control; what is left is what Newton's method leaves at each step.
TEST(CircuitProperty, BalancesOverTimeAreAnIdentity) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    Plant plant = plant_of(seed);
    plant.history = "history: {start: {all: water}, until: 5 h, every: 0.05 h}\n";
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const RunResult r = test::run(plant.text());
    ASSERT_TRUE(r.time_ok);
    double worst = 0;
    for (const Snapshot& at : r.history)
      if (at.time > 0) worst = std::max({worst, at.closures.elements, at.closures.water, at.closures.mass});
    EXPECT_LT(worst, 1e-8);
  }
}

TEST(CircuitProperty, OrderInTheFileChangesNothing) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    Plant plant = plant_of(seed);
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const RunResult before = test::run(plant.text());
    std::mt19937_64 random(seed + 100);
    for (int turn = 0; turn < 2; ++turn) {
      for (Entries* entries : {&plant.phases, &plant.leaching, &plant.streams, &plant.units}) std::shuffle(entries->begin(), entries->end(), random);
      const RunResult after = test::run(plant.text());
      expect_same(before, before.steady, after, after.steady, 1e-9);
    }
    if (HasFailure()) return;
  }
}

TEST(CircuitProperty, UnitsInTheFileChangeNothing) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const RunResult plain = test::run(plant_of(seed).text()), other = test::run(plant_of(seed, Unit::si).text());
    expect_same(plain, plain.steady, other, other.steady, 1e-11);  // the steady solve stops at 1e-11 of its scales; inputs differ by roundings
    if (HasFailure()) return;
  }
}

TEST(CircuitProperty, RunningTwiceGivesTheSameBits) {
  const auto bits = [](const RunResult& r) {
    std::vector<double> all;
    const auto take = [&](const Snapshot& at) {
      for (const StreamSnapshot& stream : at.streams) {
        all.insert(all.end(), stream.flow.begin(), stream.flow.end());
        all.push_back(stream.ph);
      }
      for (const UnitSnapshot& unit : at.units) all.insert(all.end(), unit.molality.begin(), unit.molality.end());
      all.insert(all.end(), at.recovery_by_family.begin(), at.recovery_by_family.end());
    };
    take(r.steady);
    for (const Snapshot& at : r.history) take(at);
    return all;
  };
  for (unsigned seed = 0; seed < plants; ++seed) {
    Plant plant = plant_of(seed);
    plant.history = "history: {start: steady, until: 4 h, every: 1 h}\n";
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const test::Case made = test::build(plant.text());
    const std::vector<double> once = bits(made.run()), again = bits(made.run()), afresh = bits(test::run(plant.text()));
    ASSERT_EQ(once.size(), again.size());
    ASSERT_EQ(once.size(), afresh.size());
    EXPECT_EQ(std::memcmp(once.data(), again.data(), once.size() * sizeof(double)), 0);
    EXPECT_EQ(std::memcmp(once.data(), afresh.data(), once.size() * sizeof(double)), 0);
    if (HasFailure()) return;
  }
}

// --- balances counted afresh

double element_in(const Circuit& circuit, int element, std::span<const double> pulp) {
  const PulpLayout& layout = circuit.context->layout;
  double sum = 0;
  for (int j = 0; j <= layout.components; ++j) sum += circuit.component_elements[j][element] * pulp[j];
  for (int k = 0; k < layout.lots; ++k) sum += circuit.context->lots[k].elements[element] * pulp[layout.lot(k)];
  return sum;
}

TEST(CircuitProperty, StreamsBalanceInElementsAndCharge) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const RunResult r = test::run(plant_of(seed).text());
    const Circuit& circuit = *r.circuit;
    for (std::size_t e = 0; e < circuit.elements.size(); ++e) {
      double in = 0, out = 0;
      for (std::size_t s = 0; s < circuit.streams.size(); ++s) {
        const double amount = element_in(circuit, static_cast<int>(e), r.steady.streams[s].flow);
        if (circuit.streams[s].source < 0) in += amount;
        if (circuit.streams[s].taker < 0) out += amount;
      }
      for (int l = 0; l < circuit.ledgers; ++l) in += circuit.component_elements[circuit.ledger_component[l]][e] * r.steady.ledger[l];
      EXPECT_NEAR(in, out, 1e-9 * std::max(std::abs(in), 1e-12)) << circuit.elements[e];
    }
    for (std::size_t s = 0; s < circuit.streams.size(); ++s) {
      double charge = 0, size = 1e-12;
      for (int j = 0; j < circuit.chemistry->component_count(); ++j) {
        const double one = circuit.chemistry->component_charge[j] * r.steady.streams[s].flow[j];
        charge += one;
        size += std::abs(one);
      }
      EXPECT_NEAR(charge, 0, 1e-9 * size) << circuit.streams[s].name;
    }
    if (HasFailure()) return;
  }
}

TEST(CircuitProperty, ExtractionAndRecoveryFollowFromStreams) {
  for (unsigned seed = 0; seed < plants; ++seed) {
    SCOPED_TRACE(fmt::format("plant {}", seed));
    const RunResult r = test::run(plant_of(seed).text());
    const Circuit& circuit = *r.circuit;
    const PulpLayout& layout = circuit.context->layout;
    const std::size_t families = circuit.chemistry->families.size();
    ASSERT_FALSE(r.recovered.empty());
    const StreamSnapshot& pregnant = r.steady.streams[circuit.pregnant_liquor];
    for (std::size_t e = 0; e < r.recovered.size(); ++e) {
      const int element = r.recovered[e];
      const auto in_lots = [&](const std::vector<double>& pulp) {
        double sum = 0;
        for (int k = 0; k < layout.lots; ++k) sum += circuit.context->lots[k].elements[element] * pulp[layout.lot(k)];
        return sum;
      };
      const double fed = in_lots(test::stream(r, r.steady, "feed").flow);
      double undissolved = 0, dissolved = 0, by_family = 0;
      for (std::size_t s = 0; s < circuit.streams.size(); ++s)
        if (circuit.streams[s].taker < 0) undissolved += in_lots(r.steady.streams[s].flow);
      for (int j = 0; j <= layout.components; ++j) dissolved += circuit.component_elements[j][element] * pregnant.dissolved[j];
      for (std::size_t f = 0; f < families; ++f) by_family += r.steady.recovery_by_family[e * families + f];
      EXPECT_NEAR(r.steady.extraction_now[e], 1 - undissolved / fed, 1e-12) << circuit.elements[element];
      EXPECT_NEAR(r.steady.recovery_now[e], dissolved / fed, 1e-9) << circuit.elements[element];
      EXPECT_NEAR(r.steady.recovery_now[e], by_family, 1e-12) << circuit.elements[element];
      EXPECT_LE(r.steady.recovery_now[e], r.steady.extraction_now[e] + 1e-9);
    }
    if (HasFailure()) return;
  }
}

}  // namespace
}  // namespace leat
