// A small builder for chemistry problems as books state them: components, constants, what is held and what is fed.
#pragma once

#include <functional>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include "models/chemistry/chemistry.hpp"
#include "sim/equilibrium/equilibrium_solver.hpp"

namespace leat::test {

const SpeciesLibrary& embedded_library();  // the library inside the program, read once; throws if it has a fault

// Every activity coefficient one and the activity of water one: what most books mean by an ideal solution.
std::shared_ptr<const ActivityModel> unit_activity();
std::shared_ptr<const ActivityModel> ideal_activity();   // the program's own; water by Raoult's law
std::shared_ptr<const ActivityModel> davies_activity();

// A solved problem; molalities are per kilogram of solvent.
class Answer {
 public:
  double molality(const std::string& species) const;      // [mol/kg]
  double dissolved(const std::string& component) const;   // all its dissolved forms [mol/kg]
  double share(const std::string& species, const std::string& component) const;  // of the component's dissolved forms [1]
  double per_metal(const std::string& ligand, const std::string& metal) const;   // ligands bound per metal [mol/mol]
  double ph() const { return state.ph; }
  double amount(const std::string& solid) const;          // [mol]
  double log10_omega(const std::string& solid) const;     // [log10]
  double exchanged(const std::string& held) const;        // taken up by what is held [mol]
  double water() const { return totals.back(); }          // all water [mol]

  std::shared_ptr<const Chemistry> chemistry;
  std::vector<double> totals;                             // water last [mol]
  std::vector<Reservoir> held;
  EquilibriumState state;
  EquilibriumSolver::Closure closure;
};

class Problem {
 public:
  // Nothing but components, atomic weights and the self-ionisation of water with 1e-14.
  Problem();
  static Problem from_library();  // everything the embedded library holds

  Problem& component(const std::string& name, ComponentRole role = ComponentRole::ligand);  // one the library has not
  Problem& weight(const std::string& element, double grams_per_mole);                       // likewise [g/mol]
  // "Ag^+ + 2 NH3 = Ag(NH3)2^+" makes its last term; an entry of that name is replaced.
  Problem& species(const std::string& reaction, double log10_k);
  // Complexes of a metal with one, two, three ... of a ligand, from stepwise constants.
  Problem& steps(const std::string& metal, const std::string& ligand, const std::vector<std::string>& names,
                 const std::vector<double>& log10_stepwise);
  Problem& solid(const std::string& reaction, double log10_ksp);  // "AgCl = Ag^+ + Cl^-"; named by its formula
  Problem& only(std::vector<std::string> names);
  Problem& never_forms();                                         // solids report their saturation alone
  Problem& activity(std::shared_ptr<const ActivityModel> model);
  Problem& debye_huckel(double a);                                // fixed [kg^0.5 mol^-0.5]
  Problem& temperature(double kelvin);
  // Counts amounts per kilogram of all water, hydroxide's included. Otherwise the water is chosen so that there is one
  // kilogram of solvent: the closed forms of the books write every concentration per unit of that.
  Problem& per_all_water();

  Problem& feed(const std::string& name, double moles);           // component, species, solid or compound
  Problem& hold_ph(double ph);
  Problem& hold(const std::string& species, double molality);     // at activity coefficient one
  Problem& hold_gas(const std::string& species, double henry, double pressure);  // henry [mol/kg/atm], pressure [atm]

  Answer solve() const;

 private:
  enum class Start { empty, library };
  explicit Problem(Start start);

  struct Held {
    std::string species;
    double ln_activity = 0;
  };
  SpeciesLibrary library_;
  ChemistryRequest request_;
  std::vector<std::pair<std::string, double>> feeds_;
  std::vector<Held> held_;
  double temperature_ = 298.15;  // [K]
  bool per_solvent_ = true;
};

// Root of a function that changes sign between two positive ends, by bisection on the logarithm.
double root_between(double low, double high, const std::function<double(double)>& function);
// Place of the least value of a function with one minimum, by golden section.
double minimum_between(double low, double high, const std::function<double(double)>& function);

}  // namespace leat::test
