#pragma once
#include <map>
#include <set>
#include <string>
#include <vector>

#include "models/process/catalogue.hpp"
#include "sim/circuit/flowsheet.hpp"
#include "sim/circuit/liquor_maker.hpp"

namespace leat {

// Which lots the solids of a flowsheet bring, and which fed minerals are at equilibrium instead.
struct LotPlan {
  struct Entry {
    std::string name, mineral, part;
    double share = 1;                       // of the mineral [1]
    const LeachingSpec* leaching = nullptr;
    LawSpec law;                            // law.law == "inert" or empty: inert
    std::map<std::string, double> products; // components by name per mol dissolved [mol/mol]
    std::vector<std::string> needed;        // components consumed by the oxidant or given by the reductant
    Place place;
  };
  std::vector<Entry> entries;
  std::vector<std::string> at_equilibrium;  // minerals without a law
  std::set<std::string> components;         // that dissolution can bring
};

// Decides, for every fed mineral, between a law, inert and equilibrium; balances dissolution reactions and hands their
// electrons to the named oxidant. Faults: neither law nor constant, a metal without an oxidant, reactions that do not balance.
LotPlan plan_lots(const Flowsheet& flowsheet, const SpeciesLibrary& library, Diagnostics& diagnostics);

// The lots with their laws, once the chemistry is compiled.
std::vector<Lot> make_lots(const LotPlan& plan, const Flowsheet& flowsheet, const SpeciesLibrary& library, const Catalogue& catalogue,
                           const Chemistry& chemistry, const std::vector<std::string>& elements, LiquorMaker& maker,
                           Diagnostics& diagnostics);

}  // namespace leat
