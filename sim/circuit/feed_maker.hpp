#pragma once
#include <optional>
#include <vector>

#include "models/process/pulp_layout.hpp"
#include "sim/circuit/flowsheet.hpp"
#include "sim/circuit/liquor_maker.hpp"
#include "sim/circuit/lot_builder.hpp"

namespace leat {

// One feed in PulpLayout order [mol/s], and what it counts as.
struct Feed {
  std::vector<double> flow;      // [mol/s]
  double dry_solids = 0;         // [kg/s]
  double reagent = 0;            // of `counted_as` [kg/s]
  std::string counted_as;
};

// Makes the feed streams: liquors by volume or mass, solids by dry or wet mass with moisture, reagents by mass or volume.
class FeedMaker {
 public:
  FeedMaker(const Flowsheet& flowsheet, const SpeciesLibrary& library, const LotPlan& plan, const ProcessContext& context,
            LiquorMaker& maker, Diagnostics& diagnostics)
      : flowsheet_(flowsheet), library_(library), plan_(plan), context_(context), maker_(maker), diagnostics_(diagnostics) {}

  std::optional<Feed> make(const StreamSpec& stream, double temperature);

 private:
  std::optional<Feed> liquor(const StreamSpec& stream, double temperature);
  std::optional<Feed> reagent(const StreamSpec& stream, double temperature);
  std::optional<Feed> solids(const StreamSpec& stream, double temperature);
  bool add_phases(const SolidsSpec& solids, double dry, Feed& feed);
  bool add_liquor(const LiquorSpec& liquor, double temperature, double mass, Feed& feed);
  double mass_of(const std::vector<double>& amounts) const;

  const Flowsheet& flowsheet_;
  const SpeciesLibrary& library_;
  const LotPlan& plan_;
  const ProcessContext& context_;
  LiquorMaker& maker_;
  Diagnostics& diagnostics_;
};

}  // namespace leat
