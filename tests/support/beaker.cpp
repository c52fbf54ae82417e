#include "tests/support/beaker.hpp"

#include <cmath>
#include <stdexcept>

#include "tests/support/problem.hpp"

namespace leat::test {

std::shared_ptr<const Chemistry> leach_chemistry(const SpeciesLibrary& library, std::shared_ptr<const ActivityModel> activity) {
  ChemistryRequest request;
  request.components = {"Ag^+", "Cu^2+", "Zn^2+", "Fe^3+", "Ca^2+", "Na^+", "NH3", "CN^-", "Cl^-", "SO4^2-", "CO3^2-"};
  request.activity = std::move(activity);
  Diagnostics diagnostics;
  auto chemistry = compile_chemistry(library, request, {}, diagnostics);
  if (!diagnostics.ok()) throw std::runtime_error(to_string(diagnostics.faults().front()));
  return chemistry;
}

std::shared_ptr<const Chemistry> leach_chemistry(std::shared_ptr<const ActivityModel> activity) {
  return leach_chemistry(embedded_library(), std::move(activity));
}

double BeakerMaker::between(double low, double high) {
  return low * std::exp(std::uniform_real_distribution<double>(0, 1)(random_) * std::log(high / low));
}

double BeakerMaker::charge(const std::vector<double>& totals) const {
  double sum = 0;
  for (int j = 0; j < chemistry_.component_count(); ++j)
    if (j != chemistry_.hydrogen) sum += totals[j] * chemistry_.component_charge[j];
  return sum;
}

std::vector<double> BeakerMaker::next() {
  const int kind = made_++ % 3, count = chemistry_.component_count();
  std::vector<double> totals(count + 1, 0.0);
  totals[count] = 55.508;
  for (int j = 0; j < count; ++j) {
    if (j == chemistry_.hydrogen) continue;
    const std::string& name = chemistry_.component_names[j];
    if (kind < 2) totals[j] = between(1e-12, 5);
    else if (name == "NH3") totals[j] = between(0.01, 5);
    else if (name == "Cl^-") totals[j] = between(1e-3, 4);
    else if (name == "CN^-") totals[j] = between(1e-5, 0.1);
    else totals[j] = between(1e-6, 0.3);
  }
  if (kind > 0) {
    const double left = between(1e-12, 0.1) * (between(1, 2) < std::sqrt(2.0) ? -1 : 1);
    const double needed = left - charge(totals);
    totals[chemistry_.find_component(needed > 0 ? "Na^+" : "Cl^-")] += std::abs(needed);
  }
  totals[chemistry_.hydrogen] = -charge(totals);
  return totals;
}

std::vector<double> BeakerMaker::near(const std::vector<double>& totals, double fraction) {
  std::vector<double> moved = totals;
  for (int j = 0; j < chemistry_.component_count(); ++j)
    if (j != chemistry_.hydrogen) moved[j] *= between(1 - fraction, 1 + fraction);
  moved[chemistry_.hydrogen] = -charge(moved);
  return moved;
}

}  // namespace leat::test
