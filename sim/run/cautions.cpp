#include "sim/run/cautions.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"

namespace leat {
namespace {

// Triggers (common practice, no source, unless a limit is named).
constexpr double low_ph_with_cyanide = 10.0;
constexpr double alarm_ph_with_cyanide = 9.5;
constexpr double silver_to_watch = 1.0;       // 0.1 g/L [mol/m3]
constexpr double ammonia_to_watch = 0.1;      // free [mol/kg]
constexpr double least_ppm = 0.05;            // below it a tenor is not worth a line

// The strictest usable limit of a substance.
const AirLimit* strictest(const SpeciesLibrary& library, const std::string& substance) {
  const AirLimit* found = nullptr;
  for (const AirLimit& limit : library.air_limits)
    if (limit.substance == substance && limit.ppm > 0 && (!found || limit.ppm < found->ppm)) found = &limit;
  return found;
}

void add(std::vector<Caution>& cautions, const std::string& kind, std::string text) {
  for (const Caution& one : cautions)
    if (one.kind == kind && one.text == text) return;
  cautions.push_back({kind, std::move(text)});
}

// Tenor in still air at equilibrium [ppm by volume].
double tenor(const Chemistry& chemistry, const std::string& dissolved, const LiquorToWatch& liquor, double pressure) {
  for (const GasRow& gas : chemistry.gases)
    if (chemistry.species[gas.species].name == dissolved)
      return 1e6 * (*liquor.molality)[gas.species] / chemistry.henry(gas, liquor.temperature) / pressure;
  return 0;
}

void watch_gas(const SpeciesLibrary& library, const Chemistry& chemistry, double pressure, const LiquorToWatch& liquor,
               const std::string& substance, const std::string& kind, std::vector<Caution>& cautions) {
  const double ppm = tenor(chemistry, substance, liquor, pressure);
  const AirLimit* limit = strictest(library, substance);
  if (!limit || ppm < least_ppm || ppm < limit->ppm) return;
  add(cautions, kind,
      fmt::format("{}: {} over still liquor reaches {:.3g} ppm at equilibrium (pH {:.2f}, {:.0f} degC; an upper bound, ventilation lowers it) "
                  "against {:.3g} ppm, {} {} ({})",
                  liquor.place, substance, ppm, liquor.ph, liquor.temperature - zero_celsius, limit->ppm, limit->body, limit->kind, limit->year));
}

}  // namespace

void watch_liquor(const SpeciesLibrary& library, const Chemistry& chemistry, double pressure, const LiquorToWatch& liquor,
                  std::vector<Caution>& cautions) {
  const auto total = [&](const char* name) {
    const int j = chemistry.find_component(name);
    return j < 0 || j >= chemistry.component_count() ? 0.0 : (*liquor.dissolved)[j];
  };
  const auto molality = [&](const char* name) {
    const int i = chemistry.find_species(name);
    return i < 0 ? 0.0 : (*liquor.molality)[i];
  };
  const double cyanide = total("CN^-"), ammonia = molality("NH3");
  if (cyanide > 1e-3) {
    watch_gas(library, chemistry, pressure, liquor, "HCN", "hydrogen cyanide", cautions);
    if (liquor.ph < alarm_ph_with_cyanide)
      add(cautions, "hydrogen cyanide",
          fmt::format("{}: cyanide at pH {:.2f}, below {}: toxic hydrogen cyanide is set free; raise the pH before anyone opens the vessel", liquor.place,
                      liquor.ph, alarm_ph_with_cyanide));
    else if (liquor.ph < low_ph_with_cyanide)
      add(cautions, "hydrogen cyanide",
          fmt::format("{}: cyanide at pH {:.2f}, below {}: the share of hydrogen cyanide grows tenfold for each unit of pH", liquor.place, liquor.ph,
                      low_ph_with_cyanide));
    add(cautions, "cyanide effluent", "cyanide liquors and tails leave here: destroy cyanide before discharge and check against the limits of the site");
  }
  if (total("NH3") > 1) watch_gas(library, chemistry, pressure, liquor, "NH3", "ammonia vapour", cautions);
  if (total("Ag^+") > silver_to_watch && ammonia > ammonia_to_watch)
    add(cautions, "silver ammine",
        fmt::format("{}: {:.3g} g/L silver with {:.3g} mol/kg free ammonia: on standing, evaporation, heating or with caustic such liquors may form explosive "
                    "silver solids; do not store or dry them, precipitate the silver promptly as chloride or sulfide, wash films off wet",
                    liquor.place, total("Ag^+") * 0.1078682, ammonia));
  if (liquor.acid_added && total("NH3") > 1)
    add(cautions, "acid meets ammonia",
        liquor.place + ": acid meets ammonia: heat, spitting and, with volatile acids, white smoke of ammonium salts; add acid slowly, cooled, and keep the vents apart");
  if (liquor.acid_added && cyanide > 1e-3)
    add(cautions, "acid meets cyanide", liquor.place + ": acid meets cyanide: hydrogen cyanide is set free at once; do not do this outside a gas-tight, scrubbed plant");
  const double most = chemistry.activity->largest_ionic_strength();
  if (liquor.ionic_strength > most)
    add(cautions, "range of the activity model",
        fmt::format("{}: ionic strength {:.3g} mol/kg is beyond the range of {} ({:.3g} mol/kg), held there: activity coefficients are those at the end of the range",
                    liquor.place, liquor.ionic_strength, chemistry.activity->name(), most));
}

void watch_constants(const Chemistry& chemistry, std::vector<Caution>& cautions) {
  std::string memory, measured, own;
  const auto append = [](std::string& list, const std::string& name) { list += (list.empty() ? "" : ", ") + name; };
  for (const UsedConstant& used : chemistry.constants) {
    const Provenance& from = used.constant.provenance;
    if (from.user) append(own, used.name);
    else if (from.evidence == "from memory") append(memory, used.name);
    if (used.constant.ionic_strength > 0.05) append(measured, fmt::format("{} (I {:.3g})", used.name, used.constant.ionic_strength));
  }
  if (!own.empty()) add(cautions, "the user's own constants", own);
  if (!memory.empty()) add(cautions, "constants from memory", memory);
  if (!measured.empty()) add(cautions, "constants measured above zero ionic strength, used as measured", measured);
  if (!chemistry.liquor_volume.without_volume().empty()) {
    std::string list;
    for (const std::string& name : chemistry.liquor_volume.without_volume()) append(list, name);
    add(cautions, "density without a volume for", list);
  }
}

std::string closing_caution() {
  return "estimates only: no substitute for measurement, a hazard study, local codes and licensed practice";
}

void find_cautions(const SpeciesLibrary& library, RunResult& result) {
  const Circuit& circuit = *result.circuit;
  const Chemistry& chemistry = *circuit.chemistry;
  const auto look = [&](const Snapshot& snapshot) {
    for (std::size_t v = 0; v < snapshot.units.size(); ++v) {
      const UnitSnapshot& unit = snapshot.units[v];
      LiquorToWatch liquor{circuit.units[result.vessels[v]].name, unit.temperature, unit.ph, unit.ionic_strength, &unit.molality, &unit.total, false};
      watch_liquor(library, chemistry, result.site_pressure, liquor, result.cautions);
    }
  };
  if (result.steady_ok) look(result.steady);
  // A join that brings acid to ammonia or cyanide.
  for (const CircuitUnit& unit : circuit.units) {
    bool acid = false, ammonia = false, cyanide = false;
    for (int s : unit.takes) {
      const StreamSnapshot* stream = result.steady_ok ? &result.steady.streams[s] : nullptr;
      if (!stream || std::isnan(stream->ph)) continue;
      const int nh3 = chemistry.find_component("NH3"), cn = chemistry.find_component("CN^-");
      acid = acid || stream->ph < 4;
      ammonia = ammonia || (nh3 >= 0 && stream->dissolved[nh3] > 1 * stream->liquor_volume);
      cyanide = cyanide || (cn >= 0 && stream->dissolved[cn] > 1e-3 * stream->liquor_volume);
    }
    if (acid && ammonia) add(result.cautions, "acid meets ammonia", unit.name + ": an acid stream meets ammonia: heat, and smoke with volatile acids; keep the vents apart");
    if (acid && cyanide) add(result.cautions, "acid meets cyanide", unit.name + ": an acid stream meets cyanide: hydrogen cyanide is set free at once");
  }
  for (const std::string& mineral : result.at_equilibrium)
    add(result.cautions, "at equilibrium", mineral + " is fed without a law: it is taken to be at equilibrium in every vessel and stream");
  const CircuitStream& pregnant = circuit.streams[circuit.pregnant_liquor];
  if (pregnant.taker >= 0)
    add(result.cautions, "recovery read inside the circuit",
        pregnant.name + " goes on to " + circuit.units[pregnant.taker].name + ": metal that comes back through it is counted again");
  watch_constants(chemistry, result.cautions);
}

}  // namespace leat
