#include "sim/circuit/feed_maker.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

namespace leat {

double FeedMaker::mass_of(const std::vector<double>& amounts) const {
  double mass = 0;
  for (int j = 0; j <= context_.layout.components; ++j) mass += amounts[j] * context_.chemistry->component_mass[j];
  return mass;
}

std::optional<Feed> FeedMaker::make(const StreamSpec& stream, double temperature) {
  constexpr double most = 1e6;  // no plant's stream [m3/s or kg/s]
  const Quantity& rate = stream.rate.quantity;
  for (const char* unit : {"m3/s", "kg/s"})
    if (convertible(rate.unit, unit) && !(convert(rate, unit) < most)) {
      diagnostics_.fault(Code::out_of_range, stream.rate.place, fmt::format("{} {} is out of range; allowed is less than {:.0e} {}", rate.number, rate.unit, most, unit));
      return std::nullopt;
    }
  if (!stream.solids.empty()) return solids(stream, temperature);
  if (!stream.reagent.empty()) return reagent(stream, temperature);
  return liquor(stream, temperature);
}

std::optional<Feed> FeedMaker::liquor(const StreamSpec& stream, double temperature) {
  if (!stream.liquor) return std::nullopt;
  const auto amounts = maker_.per_volume(*stream.liquor, *context_.chemistry, temperature);
  if (!amounts) return std::nullopt;
  double volume = 0;
  if (convertible(stream.rate.quantity.unit, "m3/s"))
    volume = convert(stream.rate.quantity, "m3/s");
  else
    volume = convert(stream.rate.quantity, "kg/s") / mass_of(*amounts);
  Feed feed;
  feed.flow.assign(context_.layout.size(), 0.0);
  for (int j = 0; j <= context_.layout.components; ++j) feed.flow[j] = volume * (*amounts)[j];
  return feed;
}

std::optional<Feed> FeedMaker::reagent(const StreamSpec& stream, double temperature) {
  const auto spec = std::find_if(flowsheet_.reagents.begin(), flowsheet_.reagents.end(),
                                 [&](const ReagentSpec& one) { return one.name == stream.reagent; });
  if (spec == flowsheet_.reagents.end()) return std::nullopt;
  const Chemistry& chemistry = *context_.chemistry;
  std::vector<double> per_kg(chemistry.component_count() + 1, 0.0);
  double rest = 1;
  for (const NamedAmount& one : spec->made_of)
    if (!one.amount.rest) rest -= convert(one.amount.quantity, "1");
  double counted_share = 0, counted_mass = 0;
  ComponentAmounts counted;
  if (!spec->counted_as.empty() && !maker_.resolve(spec->counted_as, spec->place, counted, counted_mass)) return std::nullopt;
  for (const NamedAmount& one : spec->made_of) {
    double mass = 0;
    const auto row = maker_.row(one.name, one.amount.place, chemistry, mass);
    if (!row) return std::nullopt;
    const double share = one.amount.rest ? rest : convert(one.amount.quantity, "1");
    for (std::size_t j = 0; j < row->size(); ++j) per_kg[j] += share / mass * (*row)[j];
    // Counted as: by the component both have besides H and O.
    ComponentAmounts own;
    if (!spec->counted_as.empty() && maker_.resolve(one.name, one.amount.place, own, mass))
      for (const auto& [component, count] : counted.amounts)
        if (component != "H2O" && component != "H^+" && count > 0 && own.amounts.count(component)) {
          counted_share += share / mass * own.amounts[component] / count * counted_mass;
          break;
        }
  }
  if (spec->counted_as.empty()) counted_share = 1;
  if (!(counted_share > 0)) {
    diagnostics_.fault(Code::bad_data, spec->place, fmt::format("reagent {} is counted as {}, of which it has nothing", spec->name, spec->counted_as));
    return std::nullopt;
  }
  double charge = 0, size = 0;
  for (int j = 0; j < chemistry.water(); ++j) {
    charge += chemistry.component_charge[j] * per_kg[j];
    size += std::abs(chemistry.component_charge[j] * per_kg[j]);
  }
  if (std::abs(charge) > 1e-9 * size) {
    diagnostics_.fault(Code::does_not_balance, spec->place,
                       fmt::format("reagent {} carries a charge of {:+.4g} mol/kg; write neutral compounds", spec->name, charge));
    return std::nullopt;
  }
  const double volume_per_kg = chemistry.liquor_volume.volume(temperature, per_kg, {});
  const double mass = convertible(stream.rate.quantity.unit, "kg/s") ? convert(stream.rate.quantity, "kg/s")
                                                                      : convert(stream.rate.quantity, "m3/s") / volume_per_kg;
  Feed feed;
  feed.flow.assign(context_.layout.size(), 0.0);
  for (std::size_t j = 0; j < per_kg.size(); ++j) feed.flow[j] = mass * per_kg[j];
  feed.reagent = mass * counted_share;
  feed.counted_as = spec->counted_as.empty() ? spec->name : spec->counted_as;
  return feed;
}

bool FeedMaker::add_phases(const SolidsSpec& solids, double dry, Feed& feed) {
  double rest = 1;
  for (const SolidPhaseSpec& phase : solids.phases)
    if (!phase.share.rest) rest -= convert(phase.share.quantity, "1");
  for (const SolidPhaseSpec& phase : solids.phases) {
    const double mass = dry * (phase.share.rest ? rest : convert(phase.share.quantity, "1"));
    if (std::find(plan_.at_equilibrium.begin(), plan_.at_equilibrium.end(), phase.mineral) != plan_.at_equilibrium.end()) {
      double molar_mass = 0;
      const auto row = maker_.row(phase.mineral, phase.share.place, *context_.chemistry, molar_mass);
      if (!row) return false;
      for (std::size_t j = 0; j < row->size(); ++j) feed.flow[j] += mass / molar_mass * (*row)[j];
      continue;
    }
    for (std::size_t k = 0; k < plan_.entries.size(); ++k)
      if (plan_.entries[k].mineral == phase.mineral ||
          (library_.find_solid(phase.mineral) && plan_.entries[k].mineral == library_.find_solid(phase.mineral)->name))
        feed.flow[context_.layout.lot(static_cast<int>(k))] += mass * plan_.entries[k].share / context_.lots[k].molar_mass;
  }
  return true;
}

bool FeedMaker::add_liquor(const LiquorSpec& liquor, double temperature, double mass, Feed& feed) {
  const auto amounts = maker_.per_volume(liquor, *context_.chemistry, temperature);
  if (!amounts) return false;
  const double volume = mass / mass_of(*amounts);
  for (int j = 0; j <= context_.layout.components; ++j) feed.flow[j] += volume * (*amounts)[j];
  return true;
}

std::optional<Feed> FeedMaker::solids(const StreamSpec& stream, double temperature) {
  const auto spec = std::find_if(flowsheet_.solids.begin(), flowsheet_.solids.end(),
                                 [&](const SolidsSpec& one) { return one.name == stream.solids; });
  if (spec == flowsheet_.solids.end()) return std::nullopt;
  const double rate = convert(stream.rate.quantity, "kg/s");
  Feed feed;
  feed.flow.assign(context_.layout.size(), 0.0);
  // The liquor that comes with the solids: of a pulp, by its solids fraction, or the moisture.
  const double wet = stream.solids_fraction ? 1 - *stream.solids_fraction : spec->moisture;
  const double dry = stream.rate_dry ? rate : rate * (1 - wet);
  feed.dry_solids = dry;
  if (!add_phases(*spec, dry, feed)) return std::nullopt;
  const double liquor_mass = dry * wet / (1 - wet);
  if (liquor_mass > 0) {
    const LiquorSpec& own = stream.solids_fraction && stream.liquor ? *stream.liquor : spec->moisture_liquor;
    if (!add_liquor(own, temperature, liquor_mass, feed)) return std::nullopt;
  }
  return feed;
}

}  // namespace leat
