#include "sim/circuit/circuit.hpp"

namespace leat {

int Circuit::find_unit(const std::string& name) const {
  for (std::size_t u = 0; u < units.size(); ++u)
    if (units[u].name == name) return static_cast<int>(u);
  return -1;
}

int Circuit::find_stream(const std::string& name) const {
  for (std::size_t s = 0; s < streams.size(); ++s)
    if (streams[s].name == name) return static_cast<int>(s);
  return -1;
}

double Circuit::element_in_liquor(int element, std::span<const double> pulp) const {
  double sum = 0;
  for (int j = 0; j <= context->layout.components; ++j) sum += component_elements[j][element] * pulp[j];
  return sum;
}

double Circuit::element_in_lots(int element, std::span<const double> pulp) const {
  double sum = 0;
  for (int k = 0; k < context->layout.lots; ++k) sum += context->lots[k].elements[element] * pulp[context->layout.lot(k)];
  return sum;
}

}  // namespace leat
