#include "sim/run/family_content.hpp"

namespace leat {

double family_content(const Circuit& circuit, int element, int family, std::span<const double> molality) {
  const Chemistry& c = *circuit.chemistry;
  double sum = 0;
  for (std::size_t i = 0; i < c.species.size(); ++i) {
    if (c.species[i].family != c.families[family]) continue;
    double atoms = 0;
    for (const Share& share : c.species[i].shares) atoms += share.coefficient * circuit.component_elements[share.component][element];
    sum += atoms * molality[i];
  }
  return sum;
}

}  // namespace leat
