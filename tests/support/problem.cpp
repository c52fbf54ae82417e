#include "tests/support/problem.hpp"

#include <algorithm>
#include <cmath>
#include <set>
#include <stdexcept>

#include "models/activity/davies.hpp"
#include "models/activity/ideal.hpp"
#include "models/data/embedded.hpp"
#include "sim/input/read_library.hpp"

namespace leat::test {
namespace {

const double ln10 = std::log(10.0);

// Fails the test that asked.
[[noreturn]] void refuse(const std::string& why) { throw std::runtime_error(why); }

class UnitActivity final : public ActivityModel {
 public:
  std::string_view name() const override { return "unit"; }
  std::string_view source() const override { return "all activities equal to molalities, water one"; }
  std::vector<ActivityArgument> arguments(std::span<const ActivitySpecies> species) const override {
    return ionic_strength_and_sum(species);
  }
  void evaluate(std::span<const ActivitySpecies>, const ActivityConditions&, std::span<const double>, ActivityValues& out) const override {
    std::fill(out.ln_gamma.begin(), out.ln_gamma.end(), 0.0);
    std::fill(out.dln_gamma.begin(), out.dln_gamma.end(), 0.0);
    std::fill(out.dln_water.begin(), out.dln_water.end(), 0.0);
    out.ln_water = 0;
  }
  double largest_ionic_strength() const override { return 1e9; }
};

std::vector<ReactionTerm> terms_of(const std::string& reaction) {
  std::string fault;
  const auto terms = parse_reaction(reaction, fault);
  if (!terms) refuse(fault);
  return *terms;
}

Formula formula_of(const std::string& text) {
  std::string fault;
  const auto formula = parse_formula(text, fault);
  if (!formula) refuse(fault);
  return *formula;
}

EquilibriumConstant constant_of(double log10_k) {
  EquilibriumConstant constant;
  constant.log10_k = log10_k;
  constant.medium = "dilute";
  constant.provenance.source = "the problem";
  constant.provenance.evidence = "published";
  return constant;
}

double coefficient_of(const MassActionRow& row, int component) {
  for (const Share& share : row.shares)
    if (share.component == component) return share.coefficient;
  return 0;
}

}  // namespace

const SpeciesLibrary& embedded_library() {
  static const SpeciesLibrary library = [] {
    std::vector<std::pair<std::string_view, std::string_view>> files;
    for (const EmbeddedFile& file : embedded_data()) files.emplace_back(file.name, file.text);
    Diagnostics diagnostics;
    SpeciesLibrary read = read_library(files, diagnostics);
    if (!diagnostics.ok()) refuse(to_string(diagnostics.faults().front()));
    return read;
  }();
  return library;
}

std::shared_ptr<const ActivityModel> unit_activity() { return std::make_shared<UnitActivity>(); }
std::shared_ptr<const ActivityModel> ideal_activity() { return make_ideal_activity(); }
std::shared_ptr<const ActivityModel> davies_activity() { return make_davies_activity(); }

double Answer::molality(const std::string& species) const {
  const int i = chemistry->find_species(species);
  if (i < 0) refuse("no species " + species);
  return state.molality[i];
}

double Answer::dissolved(const std::string& component) const {
  const int j = chemistry->find_component(component);
  if (j < 0) refuse("no component " + component);
  double sum = 0;
  for (std::size_t i = 0; i < chemistry->species.size(); ++i) sum += coefficient_of(chemistry->species[i], j) * state.molality[i];
  return sum;
}

double Answer::share(const std::string& species, const std::string& component) const {
  const int i = chemistry->find_species(species), j = chemistry->find_component(component);
  if (i < 0 || j < 0) refuse("no species " + species + " or component " + component);
  return coefficient_of(chemistry->species[i], j) * state.molality[i] / dissolved(component);
}

double Answer::per_metal(const std::string& ligand, const std::string& metal) const {
  const int l = chemistry->find_component(ligand), m = chemistry->find_component(metal);
  if (l < 0 || m < 0) refuse("no component " + ligand + " or " + metal);
  double bound = 0;
  for (std::size_t i = 0; i < chemistry->species.size(); ++i)
    if (coefficient_of(chemistry->species[i], m) != 0) bound += coefficient_of(chemistry->species[i], l) * state.molality[i];
  return bound / dissolved(metal);
}

double Answer::amount(const std::string& solid) const {
  const int s = chemistry->find_phase(solid);
  if (s < 0) refuse("no solid " + solid);
  return state.phase_amount[s];
}

double Answer::log10_omega(const std::string& solid) const {
  const int s = chemistry->find_phase(solid);
  if (s < 0) refuse("no solid " + solid);
  return state.log10_omega[s];
}

double Answer::exchanged(const std::string& name) const {
  for (std::size_t r = 0; r < held.size(); ++r)
    if (held[r].name == name) return state.phase_amount[chemistry->phases.size() + r];
  refuse("nothing is held under " + name);
}

Problem::Problem(Start start) : library_(embedded_library()) {
  request_.one_kg_water_per_litre = true;
  request_.activity = unit_activity();
  if (start == Start::library) return;
  library_.species.clear();
  library_.solids.clear();
  library_.gases.clear();
  species("H2O = H^+ + OH^-", -14);
}

Problem::Problem() : Problem(Start::empty) {}

Problem Problem::from_library() { return Problem(Start::library); }

Problem& Problem::component(const std::string& name, ComponentRole role) {
  if (library_.component(name)) return *this;
  ComponentEntry entry;
  entry.name = entry.total_name = name;
  entry.role = role;
  entry.formula = formula_of(name);
  library_.components.push_back(entry);
  return *this;
}

Problem& Problem::weight(const std::string& element, double grams_per_mole) {
  library_.atomic_weights.emplace(element, grams_per_mole / 1000);
  return *this;
}

Problem& Problem::species(const std::string& reaction, double log10_k) {
  SpeciesEntry entry;
  entry.reaction = terms_of(reaction);
  entry.name = entry.reaction.back().name;
  entry.formula = formula_of(entry.name);
  entry.constant = constant_of(log10_k);
  std::erase_if(library_.species, [&](const SpeciesEntry& one) { return one.name == entry.name; });
  library_.species.push_back(entry);
  return *this;
}

Problem& Problem::steps(const std::string& metal, const std::string& ligand, const std::vector<std::string>& names,
                        const std::vector<double>& log10_stepwise) {
  for (std::size_t k = 0; k < names.size(); ++k)
    species((k == 0 ? metal : names[k - 1]) + " + " + ligand + " = " + names[k], log10_stepwise.at(k));
  return *this;
}

Problem& Problem::solid(const std::string& reaction, double log10_ksp) {
  SolidEntry entry;
  entry.reaction = terms_of(reaction);
  entry.name = entry.formula_text = entry.reaction.front().name;
  entry.formula = formula_of(entry.formula_text);
  entry.constant = constant_of(log10_ksp);
  entry.density = 5000;
  entry.forms_readily = true;
  std::erase_if(library_.solids, [&](const SolidEntry& one) { return one.name == entry.name || one.formula_text == entry.formula_text; });
  library_.solids.push_back(entry);
  return *this;
}

Problem& Problem::only(std::vector<std::string> names) {
  request_.only = std::move(names);
  return *this;
}

Problem& Problem::never_forms() {
  for (const SolidEntry& entry : library_.solids)
    if (entry.constant) request_.forms_slowly.push_back(entry.name);
  return *this;
}

Problem& Problem::activity(std::shared_ptr<const ActivityModel> model) {
  request_.activity = std::move(model);
  return *this;
}

Problem& Problem::debye_huckel(double a) {
  request_.fixed_debye_huckel_a = a;
  return *this;
}

Problem& Problem::temperature(double kelvin) {
  temperature_ = kelvin;
  return *this;
}

Problem& Problem::per_all_water() {
  per_solvent_ = false;
  return *this;
}

Problem& Problem::feed(const std::string& name, double moles) {
  feeds_.emplace_back(name, moles);
  return *this;
}

Problem& Problem::hold_ph(double ph) {
  held_.push_back({"H^+", -ph * ln10});
  return *this;
}

Problem& Problem::hold(const std::string& species, double molality) {
  held_.push_back({species, std::log(molality)});
  return *this;
}

Problem& Problem::hold_gas(const std::string& species, double henry, double pressure) { return hold(species, henry * pressure); }

Answer Problem::solve() const {
  std::vector<ComponentAmounts> parts(feeds_.size() + held_.size());
  std::set<std::string> present;
  for (std::size_t k = 0; k < parts.size(); ++k) {
    const std::string& name = k < feeds_.size() ? feeds_[k].first : held_[k - feeds_.size()].species;
    double mass = 0;
    std::string fault;
    if (!components_of(library_, name, parts[k], mass, fault)) refuse(fault);
    for (const auto& [component, amount] : parts[k].amounts) present.insert(component);
  }
  ChemistryRequest request = request_;
  request.components.assign(present.begin(), present.end());
  Diagnostics diagnostics;
  Answer answer;
  answer.chemistry = compile_chemistry(library_, request, {}, diagnostics);
  if (!diagnostics.ok()) refuse(to_string(diagnostics.faults().front()));
  const Chemistry& c = *answer.chemistry;

  std::vector<double> fed(c.component_names.size(), 0.0);
  for (std::size_t k = 0; k < feeds_.size(); ++k)
    for (const auto& [component, amount] : parts[k].amounts) fed[c.find_component(component)] += feeds_[k].second * amount;
  for (const Held& one : held_) {
    const int i = c.find_species(one.species);
    if (i < 0) refuse("nothing to hold: " + one.species);
    const MassActionRow& row = c.species[i];
    answer.held.push_back({one.species, row.shares, row.water, one.ln_activity - ln10 * c.log10_k(row, temperature_)});
  }
  const double one_kilogram = 1 / c.component_mass[c.water()];  // [mol]
  double more = 0;                                             // water beyond the kilogram [mol]
  EquilibriumSolver solver(answer.chemistry);
  for (int turn = 0; turn < 60; ++turn) {
    answer.totals = fed;
    answer.totals[c.water()] += one_kilogram + more;
    const SolveReport report = solver.solve_cold(answer.totals, temperature_, answer.state, answer.held);
    if (!report.ok) refuse("not solved: " + report.message + " (" + report.worst + ")");
    if (!per_solvent_ || std::abs(1 - answer.state.solvent) < 1e-14) break;
    more += (1 - answer.state.solvent) * one_kilogram;
  }
  if (per_solvent_ && std::abs(1 - answer.state.solvent) > 1e-12) refuse("the kilogram of solvent was not found");
  answer.closure = solver.closure(answer.totals, temperature_, answer.state);
  return answer;
}

double root_between(double low, double high, const std::function<double(double)>& function) {
  const bool rising = function(high) > 0;
  if ((function(low) > 0) == rising) refuse("no change of sign between the ends");
  for (int turn = 0; turn < 200 && high / low - 1 > 1e-14; ++turn) {
    const double middle = std::sqrt(low * high);
    ((function(middle) > 0) == rising ? high : low) = middle;
  }
  return std::sqrt(low * high);
}

double minimum_between(double low, double high, const std::function<double(double)>& function) {
  const double golden = (std::sqrt(5.0) - 1) / 2;
  double a = high - golden * (high - low), b = low + golden * (high - low);
  double at_a = function(a), at_b = function(b);
  while (high - low > 1e-6) {
    if (at_a < at_b) {
      high = b, b = a, at_b = at_a;
      a = high - golden * (high - low), at_a = function(a);
    } else {
      low = a, a = b, at_a = at_b;
      b = low + golden * (high - low), at_b = function(b);
    }
  }
  return (low + high) / 2;
}

}  // namespace leat::test
