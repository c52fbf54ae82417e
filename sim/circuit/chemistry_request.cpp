#include "sim/circuit/chemistry_request.hpp"

namespace leat {

ChemistryRequest request_of(const ChemistrySpec& chemistry, const std::set<std::string>& components, const Catalogue& catalogue) {
  ChemistryRequest request;
  request.components.assign(components.begin(), components.end());
  request.families = chemistry.families;
  request.may_form = chemistry.may_form;
  request.may_form_given = chemistry.may_form_given;
  request.forms_slowly = chemistry.forms_slowly;
  request.only = chemistry.only;
  request.places = chemistry.places;
  request.one_kg_water_per_litre = chemistry.one_kg_water_per_litre;
  request.fixed_debye_huckel_a = chemistry.debye_huckel_a;
  request.activity = catalogue.activity.at(chemistry.activity)();
  return request;
}

}  // namespace leat
