// Random liquors that can exist, from a seed.
#pragma once

#include <random>
#include <vector>

#include "models/chemistry/chemistry.hpp"

namespace leat::test {

// Copper, silver, zinc, iron, calcium and sodium with ammonia, cyanide, chloride, sulfate and carbonate, from the embedded library.
std::shared_ptr<const Chemistry> leach_chemistry(std::shared_ptr<const ActivityModel> activity);
std::shared_ptr<const Chemistry> leach_chemistry(const SpeciesLibrary& library, std::shared_ptr<const ActivityModel> activity);

// Electroneutral amounts for a kilogram of water, water last [mol]. In turn: every total between 1e-12 and 5 mol with the charge
// taken by hydrogen; the same with sodium or chloride taking all but a little of the charge; a liquor as a plant has it.
class BeakerMaker {
 public:
  BeakerMaker(const Chemistry& chemistry, unsigned long seed) : chemistry_(chemistry), random_(seed) {}
  std::vector<double> next();
  // The same liquor with every total but hydrogen's moved by up to a fraction, hydrogen's following the charge.
  std::vector<double> near(const std::vector<double>& totals, double fraction);

 private:
  double between(double low, double high);  // even in the logarithm
  double charge(const std::vector<double>& totals) const;

  const Chemistry& chemistry_;
  std::mt19937_64 random_;
  int made_ = 0;
};

}  // namespace leat::test
