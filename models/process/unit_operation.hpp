#pragma once
#include <memory>
#include <span>
#include <string>
#include <vector>

#include "models/chemistry/probe.hpp"
#include "models/core/dual.hpp"
#include "models/process/pulp_layout.hpp"

namespace leat {

// Where a unit's cell (its liquor at local equilibrium) takes its totals from.
enum class CellFrom { state, inlet };

// What the circuit must know to place a unit among the others.
struct UnitTraits {
  std::vector<std::string> outlets;
  bool hold_up = false;                  // has states; otherwise it passes its inlet on
  CellFrom cell = CellFrom::state;
  std::vector<Probe> probes;             // asked of the cell
  bool dissolves = false;                // lots react here: speeds are wanted
  std::vector<std::string> state_names;  // after the contents (PulpLayout), e.g. outlet pulp flow
  std::vector<double> state_scales;      // typical size of those states, in their units
  std::vector<std::string> ledger;       // boundary flows other than streams: component taken up from a gas [mol/s]
};

// Input of one evaluation. Spans stay valid during the call.
template <class Real>
struct UnitView {
  std::span<const Real> state;    // contents in PulpLayout order [mol], then the unit's own states
  std::span<const Real> inlet;    // sum of the streams it takes [mol/s]
  std::span<const Real> probes;
  std::span<const Real> speeds;   // of every lot [1/s]; zero for inert lots
  std::span<const double> volume_gradient;  // d(liquor and formed solids volume)/d(component) [m3/mol], held constant
};

template <class Real>
struct UnitAnswer {
  std::span<Real> rates;    // d state / dt
  std::span<Real> outlets;  // outlet after outlet [mol/s]
  std::span<Real> ledger;   // [mol/s], positive into the unit
};

// Contract of a unit operation. Its equations are written once, over the number type (UnitOperationOf).
class UnitOperation {
 public:
  virtual ~UnitOperation() = default;
  virtual const UnitTraits& traits() const = 0;
  virtual void evaluate(const UnitView<double>& in, UnitAnswer<double>& out) const = 0;
  virtual void evaluate(const UnitView<Dual>& in, UnitAnswer<Dual>& out) const = 0;
  // A reason why the solved values cannot be (underflow thinner than the feed ...); empty if they can.
  virtual std::string objection(const UnitView<double>&) const { return {}; }
  // Contents and own states from a liquor filled in at the start; `per_volume` in PulpLayout order [mol/m3], `flow` what
  // the feeds of the circuit make together [m3/s].
  virtual std::vector<double> filled_with(std::span<const double> per_volume, double) const { return {per_volume.begin(), per_volume.end()}; }
  virtual double temperature() const = 0;   // [K]
  virtual void set_temperature(double kelvin) = 0;  // before first use: a unit that passes on takes that of its inlets
  virtual double live_volume() const { return 0; }  // [m3]
};

// Gives the two virtual forms from one template member `equations(view, answer)` of the derived unit.
template <class Derived>
class UnitOperationOf : public UnitOperation {
 public:
  const UnitTraits& traits() const override { return traits_; }
  double temperature() const override { return temperature_; }
  void set_temperature(double kelvin) override { temperature_ = kelvin; }
  void evaluate(const UnitView<double>& in, UnitAnswer<double>& out) const override {
    static_cast<const Derived*>(this)->equations(in, out);
  }
  void evaluate(const UnitView<Dual>& in, UnitAnswer<Dual>& out) const override {
    static_cast<const Derived*>(this)->equations(in, out);
  }

 protected:
  UnitTraits traits_;
  double temperature_ = 298.15;  // [K]
};

}  // namespace leat
