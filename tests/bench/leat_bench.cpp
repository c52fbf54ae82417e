// Benchmarks. Every time is also given in units of a reference measured in the same run, interleaved with it: one Newton
// iteration of the same cell (evaluation, residual, Jacobian, factorisation, solve).
#include <benchmark/benchmark.h>

#include <Eigen/LU>
#include <algorithm>
#include <chrono>
#include <cmath>
#include <fstream>
#include <random>
#include <sstream>

#include "models/activity/davies.hpp"
#include "models/data/embedded.hpp"
#include "models/register/register_models.hpp"
#include "sim/circuit/build_circuit.hpp"
#include "sim/equilibrium/convex_phase.hpp"
#include "sim/equilibrium/equilibrium_solver.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "sim/input/read_library.hpp"
#include "sim/run/run_case.hpp"
#include "sim/run/steady.hpp"

namespace leat {
namespace {

const SpeciesLibrary& library() {
  static const SpeciesLibrary made = [] {
    std::vector<std::pair<std::string_view, std::string_view>> files;
    for (const EmbeddedFile& file : embedded_data()) files.emplace_back(file.name, file.text);
    Diagnostics diagnostics;
    return read_library(files, diagnostics);
  }();
  return made;
}

// The cell of the benchmarks: twelve components with solids, leach-like totals, seeded.
struct CellSet {
  std::shared_ptr<const Chemistry> chemistry;
  std::vector<std::vector<double>> totals, moved;
  CellSet() {
    ChemistryRequest request;
    request.components = {"Ag^+", "Cu^2+", "Zn^2+", "Fe^3+", "Ca^2+", "Na^+", "NH3", "CN^-", "Cl^-", "SO4^2-", "CO3^2-"};
    request.activity = make_davies_activity();
    Diagnostics diagnostics;
    chemistry = compile_chemistry(library(), request, {}, diagnostics);
    std::mt19937_64 random(20);
    std::uniform_real_distribution<double> uniform(0, 1);
    const auto between = [&](double low, double high) { return low * std::pow(high / low, uniform(random)); };
    const auto neutral = [&](std::vector<double>& n) {
      double charge = 0;
      for (int j = 0; j < chemistry->component_count(); ++j)
        if (j != chemistry->hydrogen) charge += n[j] * chemistry->component_charge[j];
      n[chemistry->hydrogen] = -charge;
    };
    for (int k = 0; k < 256; ++k) {
      std::vector<double> n(chemistry->component_names.size(), 0.0), m;
      n.back() = 55.508;
      for (int j = 0; j < chemistry->component_count(); ++j) {
        const std::string& name = chemistry->component_names[j];
        n[j] = name == "NH3" ? between(0.01, 5) : name == "Cl^-" ? between(1e-3, 4) : name == "CN^-" ? between(1e-5, 0.1) : between(1e-6, 0.3);
      }
      neutral(n);
      m = n;
      for (int j = 0; j < chemistry->component_count(); ++j) m[j] *= std::exp(0.017 * (2 * uniform(random) - 1));
      neutral(m);
      totals.push_back(n);
      moved.push_back(m);
    }
  }
};

const CellSet& cells() {
  static const CellSet made;
  return made;
}

// Seconds of one Newton iteration at solved states.
class NewtonReference {
 public:
  NewtonReference() : system_(cells().chemistry), solver_(cells().chemistry) {
    for (const auto& totals : cells().totals) {
      EquilibriumState state;
      solver_.solve_cold(totals, 298.15, state);
      states_.push_back(state);
    }
    system_.set_temperature(298.15);
  }
  void once() {
    at_ = (at_ + 1) % states_.size();
    const EquilibriumState& state = states_[at_];
    system_.set_totals(cells().totals[at_]);
    const int n = static_cast<int>(state.x.size());
    f_.resize(n);
    matrix_.resize(n, n);
    system_.evaluate(state.x, state.active);
    system_.residual(state.x, state.active, {f_.data(), static_cast<std::size_t>(n)});
    system_.jacobian(state.x, state.active, {matrix_.data(), static_cast<std::size_t>(n) * n});
    CellVector step = matrix_.partialPivLu().solve(f_);
    benchmark::DoNotOptimize(step.data());
  }

 private:
  EquilibriumSystem system_;
  EquilibriumSolver solver_;
  std::vector<EquilibriumState> states_;
  std::size_t at_ = 0;
  CellVector f_;
  CellMatrix matrix_;
};

double seconds() { return std::chrono::duration<double>(std::chrono::steady_clock::now().time_since_epoch()).count(); }

double median(std::vector<double>& values) {
  std::nth_element(values.begin(), values.begin() + values.size() / 2, values.end());
  return values[values.size() / 2];
}

// Runs `work` in the loop, a batch of the reference beside each, and reports the ratio of medians.
template <class Work>
void against_newton(benchmark::State& state, Work&& work) {
  static NewtonReference reference;
  std::vector<double> mine, theirs;
  for (auto _ : state) {
    const double a = seconds();
    work();
    const double b = seconds();
    for (int k = 0; k < 8; ++k) reference.once();  // caches as they are in the middle of a solve
    const double c = seconds();
    for (int k = 0; k < 16; ++k) reference.once();
    const double d = seconds();
    state.SetIterationTime(b - a);
    mine.push_back(b - a);
    theirs.push_back((d - c) / 16);
  }
  state.counters["newton_iterations"] = median(mine) / median(theirs);
  state.counters["newton_iteration_us"] = 1e6 * median(theirs);
}

void cell_cold(benchmark::State& state, Finish finish) {
  EquilibriumSolver solver(cells().chemistry, finish);
  std::size_t k = 0;
  EquilibriumState out;
  against_newton(state, [&] { solver.solve_cold(cells().totals[k = (k + 1) % cells().totals.size()], 298.15, out); });
}
BENCHMARK_CAPTURE(cell_cold, own, Finish::own)->UseManualTime()->Unit(benchmark::kMicrosecond);
BENCHMARK_CAPTURE(cell_cold, kinsol, Finish::kinsol)->UseManualTime()->Unit(benchmark::kMicrosecond);

// Warm: from the solution at totals about one per cent away.
void cell_warm(benchmark::State& state, Finish finish) {
  EquilibriumSolver solver(cells().chemistry, finish);
  std::vector<EquilibriumState> starts(cells().totals.size());
  for (std::size_t k = 0; k < starts.size(); ++k) solver.solve_cold(cells().totals[k], 298.15, starts[k]);
  std::size_t k = 0;
  EquilibriumState out;
  against_newton(state, [&] {
    k = (k + 1) % starts.size();
    out = starts[k];
    solver.solve(cells().moved[k], 298.15, out);
  });
}
BENCHMARK_CAPTURE(cell_warm, own, Finish::own)->UseManualTime()->Unit(benchmark::kMicrosecond);
BENCHMARK_CAPTURE(cell_warm, kinsol, Finish::kinsol)->UseManualTime()->Unit(benchmark::kMicrosecond);

struct Example {
  Flowsheet flowsheet;
  BuiltCase built;
};

Example example(const std::string& name) {
  std::ifstream in(std::string(LEAT_FLOWSHEETS) + "/" + name);
  std::stringstream text;
  text << in.rdbuf();
  Diagnostics diagnostics;
  const Catalogue catalogue = register_models();
  Example made;
  made.flowsheet = *read_flowsheet(text.str(), name, catalogue, diagnostics);
  made.built = *build_circuit(made.flowsheet, library(), catalogue, diagnostics);
  return made;
}

void steady(benchmark::State& state, const char* name) {
  const Example made = example(name);
  CircuitEquations equations(made.built.steady);
  std::vector<double> y;
  SteadyReport report;
  against_newton(state, [&] { report = solve_steady(equations, y); });
  state.counters["vessels"] = static_cast<double>(made.built.steady->holding.size());
  if (!report.circuit.ok) state.SkipWithError("not converged");
}
BENCHMARK_CAPTURE(steady, ammine, "1_ammine_residue.yaml")->UseManualTime()->Unit(benchmark::kMillisecond);
BENCHMARK_CAPTURE(steady, cyano, "2_cyano_ore.yaml")->UseManualTime()->Unit(benchmark::kMillisecond);
BENCHMARK_CAPTURE(steady, chloro, "3_chloro_residue.yaml")->UseManualTime()->Unit(benchmark::kMillisecond);

// Steady solve and one simulated day from the stated filling, results stored every hour.
void day(benchmark::State& state, const char* name) {
  Example made = example(name);
  made.flowsheet.history->until = 86400;
  made.flowsheet.history->every = 3600;
  RunResult result;
  against_newton(state, [&] { result = run_case(made.flowsheet, made.built); });
  if (!result.time_ok) state.SkipWithError("the day did not run through");
  state.counters["steps"] = static_cast<double>(result.statistics.steps);
}
BENCHMARK_CAPTURE(day, ammine, "1_ammine_residue.yaml")->UseManualTime()->Unit(benchmark::kMillisecond);
BENCHMARK_CAPTURE(day, cyano, "2_cyano_ore.yaml")->UseManualTime()->Unit(benchmark::kMillisecond);
BENCHMARK_CAPTURE(day, chloro, "3_chloro_residue.yaml")->UseManualTime()->Unit(benchmark::kMillisecond);

}  // namespace
}  // namespace leat

BENCHMARK_MAIN();
