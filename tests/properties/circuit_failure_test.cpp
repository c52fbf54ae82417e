// What cannot be: a failure that names the unit and the reason, never success, never a crash; and loops without a vessel.
#include <fmt/format.h>
#include <gtest/gtest.h>

#include <cmath>

#include "tests/support/case.hpp"
#include "tests/support/expect.hpp"

namespace leat {
namespace {

constexpr const char* simple = "leat: 1\nkind: flowsheet\nsite: {air_temperature: 25 degC}\n"
                               "chemistry: {activity: ideal, density: one_kg_water_per_litre, may_form: []}\n"
                               "solids: {ore: {phases: {halite: 1 g/t, gangue: rest}, inert: [gangue], gangue_density: 2.7 t/m3}}\n"
                               "streams: {feed: {solids: ore, liquor: {NaCl: 1 g/L}, solids_fraction: 20 %, rate: 1 t/h, rate_basis: dry}}\n";

class NotANumberLaw final : public RateLaw {
 public:
  std::string_view name() const override { return "not_a_number"; }
  std::span<const Probe> probes() const override { return {}; }
  double speed(std::span<const double>, double, std::span<double>) const override { return std::nan(""); }
};

// Passes its inlet on, or holds it for a second, with one flow not a number.
class NotANumberUnit final : public UnitOperationOf<NotANumberUnit> {
 public:
  NotANumberUnit(const ProcessContext& context, bool holds) : context_(&context) {
    traits_.outlets = {"out"};
    traits_.hold_up = holds;
    traits_.cell = holds ? CellFrom::state : CellFrom::inlet;
  }
  template <class Real>
  void equations(const UnitView<Real>& in, UnitAnswer<Real>& out) const {
    for (int k = 0; k < context_->layout.size(); ++k) {
      out.outlets[k] = traits_.hold_up ? in.state[k] : in.inlet[k];
      if (traits_.hold_up) out.rates[k] = in.inlet[k] - out.outlets[k];
    }
    out.outlets[0] = Real(std::nan(""));
  }
  double live_volume() const override { return traits_.hold_up ? 1 : 0; }

 private:
  const ProcessContext* context_;
};

Catalogue with_faults() {
  Catalogue catalogue = test::registered();
  LawKind law;
  law.name = "not_a_number";
  law.make = [](const LawSettings&) { return std::make_shared<NotANumberLaw>(); };
  catalogue.laws[law.name] = law;
  for (bool holds : {false, true}) {
    UnitKind unit;
    unit.name = holds ? "bad_vessel" : "bad_pipe";
    unit.make = [holds](const UnitSettings&, const ProcessContext& context) { return std::make_unique<NotANumberUnit>(context, holds); };
    catalogue.units[unit.name] = unit;
  }
  return catalogue;
}

// Runs what cannot be run: a failure that names `unit` and says `reason`, never success.
void expect_failure(const std::string& text, const std::string& unit, const std::string& reason, const Catalogue& catalogue = test::registered()) {
  const RunResult r = test::build(text, catalogue).run();
  EXPECT_FALSE(r.steady_ok && (!r.timed || r.time_ok)) << text;
  EXPECT_NE(r.failure.find(unit), std::string::npos) << "does not name " << unit << ": " << r.failure;
  EXPECT_NE(r.failure.find(reason), std::string::npos) << "does not say '" << reason << "': " << r.failure;
}

TEST(CircuitFailure, LawThatReturnsNaN) {
  const std::string text = std::string(simple) + "leaching: {halite: {law: not_a_number}}\n"
                           "circuit: {first: {unit: tank, volume: 1 m3, temperature: 25 degC, takes: feed}}\nleaves: {out: first}\npregnant_liquor: out\n";
  expect_failure(text, "first", "halite", with_faults());
  expect_failure(text + "history: {start: {all: water}, until: 1 h, every: 1 h}\n", "first", "halite", with_faults());
}

TEST(CircuitFailure, UnitThatWritesNaN) {
  for (const char* kind : {"bad_pipe", "bad_vessel"}) {
    SCOPED_TRACE(kind);
    const std::string text = std::string(simple) + "leaching: {halite: {law: at_once}}\n" +
                             fmt::format("circuit:\n  first: {{unit: tank, volume: 1 m3, temperature: 25 degC, takes: feed}}\n"
                                         "  broken: {{unit: {}, temperature: 25 degC, takes: first}}\n"
                                         "  last: {{unit: tank, volume: 1 m3, temperature: 25 degC, takes: broken}}\n"
                                         "leaves: {{out: last}}\npregnant_liquor: out\n",
                                         kind);
    expect_failure(text, "broken", "finite", with_faults());
    expect_failure(text + "history: {start: {all: water}, until: 1 h, every: 1 h}\n", "broken", "finite", with_faults());
  }
}

TEST(CircuitFailure, UnitThatWritesNaNAtTheEnd) {
  expect_failure(std::string(simple) + "leaching: {halite: {law: at_once}}\n"
                                       "circuit:\n  first: {unit: tank, volume: 1 m3, temperature: 25 degC, takes: feed}\n"
                                       "  broken: {unit: bad_pipe, temperature: 25 degC, takes: first}\nleaves: {out: broken}\npregnant_liquor: out\n",
                 "broken", "finite", with_faults());
}

// Wash water from a later thickener to an earlier one, with no vessel in the ring.
TEST(CircuitFailure, LoopWithoutHoldUpIsSteadyOnly) {
  const std::string text = "leat: 1\nkind: flowsheet\nsite: {air_temperature: 25 degC}\n"
                           "chemistry: {activity: ideal, density: one_kg_water_per_litre, may_form: []}\n"
                           "solids: {ore: {phases: {gangue: rest}, inert: [gangue], gangue_density: 2.7 t/m3}}\n"
                           "streams:\n  feed: {solids: ore, liquor: {NaCl: 1 g/L}, solids_fraction: 50 %, rate: 1 t/h, rate_basis: dry}\n"
                           "  wash: {liquor: water, rate: 2 m3/h}\n"
                           "circuit:\n  first: {unit: mixer, takes: [feed, T2.overflow]}\n  T1: {unit: thickener, takes: first, solids_fraction: 50 %}\n"
                           "  second: {unit: mixer, takes: [T1.underflow, wash]}\n  T2: {unit: thickener, takes: second, solids_fraction: 50 %}\n"
                           "leaves: {pregnant: T1.overflow, tails: T2.underflow}\npregnant_liquor: pregnant\n";
  const RunResult r = test::run(text);
  ASSERT_TRUE(r.steady_ok);
  // Two stages at a wash ratio of two lose a seventh; a gram of salt in a kilogram of liquor is not water.
  EXPECT_RELATIVE(test::flow(r, r.steady, "T2.underflow", "Na^+") / test::flow(r, r.steady, "feed", "Na^+"), 1.0 / 7, 2e-3);
  const std::string fault = test::faults_of(text + "history: {start: {all: water}, until: 1 h, every: 1 h}\n");
  EXPECT_NE(fault.find("hold-up"), std::string::npos) << fault;
  for (const char* name : {"first", "T1", "second", "T2"}) EXPECT_NE(fault.find(name), std::string::npos) << fault;
}

TEST(CircuitFailure, NothingHoldsAnything) {
  const RunResult r = test::run("leat: 1\nkind: flowsheet\nsite: {air_temperature: 25 degC}\nstreams: {one: {liquor: {NaCl: 1 g/L}, rate: 1 m3/h}}\n"
                                "circuit: {S: {unit: splitter, takes: one, a: 25 %, b: rest}}\nleaves: {a: S.a, b: S.b}\npregnant_liquor: a\n");
  EXPECT_RELATIVE(test::flow(r, r.steady, "S.a", "Na^+"), 0.25 * test::flow(r, r.steady, "one", "Na^+"), 1e-12);
}

std::string through_tank(const std::string& rest) {
  return std::string(simple) + "leaching: {halite: {law: at_once}}\ncircuit:\n  J: {unit: tank, volume: 1 m3, temperature: 25 degC, takes: feed}\n" + rest +
         "pregnant_liquor: over\n";
}
constexpr const char* twenty_hours = "history: {start: {all: {NaCl: 1 g/L}}, until: 20 h, every: 1 h}\n";

TEST(CircuitFailure, UnderflowThinnerThanTheFeed) {
  const std::string text = through_tank("  thick: {unit: thickener, takes: J, solids_fraction: 15 %}\nleaves: {over: thick.overflow, under: thick.underflow}\n");
  expect_failure(text, "thick", "20.0 %");
  expect_failure(text + twenty_hours, "thick", "15.0 %");
}

TEST(CircuitFailure, SplitterAskedForMoreThanEnters) {
  const std::string text = through_tank("  parts: {unit: splitter, takes: J, over: 3 m3/h, b: 4 m3/h, c: rest}\nleaves: {over: parts.over, b: parts.b, c: parts.c}\n");
  expect_failure(text, "parts", "7 m3/h");
  expect_failure(text + twenty_hours, "parts", "7 m3/h");
}

// Dry solids go through a splitter as any stream does: half the salt passes the first tank, all of it leaves dissolved.
TEST(CircuitFailure, DrySolidsPassThroughASplitter) {
  const RunResult r = test::run("leat: 1\nkind: flowsheet\nsite: {air_temperature: 25 degC}\n"
                                "solids: {ore: {phases: {halite: 1 %, quartz: rest}, inert: [quartz]}}\nleaching: {halite: {law: at_once}}\n"
                                "streams: {dry: {solids: ore, rate: 1 t/h, rate_basis: dry}, w: {liquor: water, rate: 3 m3/h}}\n"
                                "circuit:\n  S: {unit: splitter, takes: dry, a: 50 %, b: rest, temperature: 25 degC}\n"
                                "  A: {unit: tank, volume: 1 m3, takes: [S.a, w], temperature: 25 degC}\n"
                                "  B: {unit: tank, volume: 1 m3, takes: [S.b, A], temperature: 25 degC}\nleaves: {out: B}\npregnant_liquor: out\n");
  EXPECT_RELATIVE(test::lot_flow(r, r.steady, "S.a", "quartz"), 0.5 * test::lot_flow(r, r.steady, "dry", "quartz"), 1e-12);
  EXPECT_RELATIVE(test::flow(r, r.steady, "A", "Na^+"), 0.5 * test::flow(r, r.steady, "B", "Na^+"), 0.02);  // of what dissolves in ten seconds
}

// A pond pumped faster than it is fed runs dry in time: its volume never goes below nothing, and the run says when and which.
TEST(CircuitFailure, SurgeDrawnEmpty) {
  const std::string pond = "  pond: {unit: surge, volume: 5 m3, draw: 6 m3/h, temperature: 25 degC, takes: J}\nleaves: {over: pond}\n";
  const RunResult r = test::build(through_tank(pond) + twenty_hours).run();
  EXPECT_FALSE(r.time_ok);
  EXPECT_NE(r.failure.find("pond"), std::string::npos) << r.failure;
  EXPECT_NE(r.failure.find("empty"), std::string::npos) << r.failure;
  for (const Snapshot& at : r.history) EXPECT_GT(test::unit(r, at, "pond").pulp_volume, 0) << at.time / 3600 << " h";
}

}  // namespace
}  // namespace leat
