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
constexpr double noble_to_watch = 1e-4;       // [mol/m3]
constexpr double acid_stream = 4;            // pH of a stream that counts as acid
constexpr double ideal_up_to = 0.1;          // ionic strength [mol/kg]
constexpr double scale_from = 0.05;          // saturation index that is told [log10]
constexpr double far_from = 5;               // of the temperature of a constant [K]
constexpr double least_ppm = 0.05;            // below it a tenor is not worth a line

// The strictest usable limit of a substance.
const AirLimit* strictest(const SpeciesLibrary& library, const std::string& substance) {
  const AirLimit* found = nullptr;
  for (const AirLimit& limit : library.air_limits)
    if (limit.substance == substance && limit.ppm > 0 && (!found || limit.ppm < found->ppm)) found = &limit;
  return found;
}

// One caution a kind and place: the weightiest stays.
void add(std::vector<Caution>& cautions, const std::string& kind, const std::string& place, std::string text, double weight = 0) {
  std::string whole = place.empty() ? std::move(text) : place + ": " + text;
  for (Caution& one : cautions) {
    if (one.kind != kind || one.place != place) continue;
    if (weight > one.weight || (place.empty() && one.text != whole && weight == one.weight)) {
      one.text = std::move(whole);
      one.weight = weight;
    }
    return;
  }
  cautions.push_back({kind, place, std::move(whole), weight});
}

// Tenor in still air at equilibrium [ppm by volume].
double tenor(const Chemistry& chemistry, const std::string& dissolved, const LiquorToWatch& liquor, double pressure) {
  for (const GasRow& gas : chemistry.gases)
    if (chemistry.species[gas.species].name == dissolved)
      // Henry's constants are per litre: mol/kg times kg of water per litre.
      return 1e6 * (*liquor.molality)[gas.species] * liquor.water_per_volume / 1000 / chemistry.henry(gas, liquor.temperature) / pressure;
  return 0;
}

void watch_gas(const SpeciesLibrary& library, const Chemistry& chemistry, double pressure, const LiquorToWatch& liquor,
               const std::string& substance, const std::string& kind, std::vector<Caution>& cautions) {
  const double ppm = tenor(chemistry, substance, liquor, pressure);
  const AirLimit* limit = strictest(library, substance);
  if (!limit || ppm < least_ppm || ppm < limit->ppm) return;
  add(cautions, kind, liquor.place,
      fmt::format("{} over still liquor reaches {:.3g} ppm at equilibrium{} (pH {:.2f}, {:.0f} degC; an upper bound, ventilation lowers it) "
                  "against {:.3g} ppm, {} {} ({})",
                  substance, ppm, liquor.when, liquor.ph, liquor.temperature - zero_celsius, limit->ppm, limit->body, limit->kind, limit->year),
      ppm);
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
    if (liquor.ph < low_ph_with_cyanide)
      add(cautions, "cyanide at low pH", liquor.place,
          fmt::format("cyanide at pH {:.2f}{}, below {}: {}", liquor.ph, liquor.when, liquor.ph < alarm_ph_with_cyanide ? alarm_ph_with_cyanide : low_ph_with_cyanide,
                      liquor.ph < alarm_ph_with_cyanide ? "toxic hydrogen cyanide is set free; raise the pH before anyone opens the vessel"
                                                        : "the share of hydrogen cyanide grows with every tenth of pH"),
          low_ph_with_cyanide - liquor.ph + 1);
    add(cautions, "cyanide effluent", "", "cyanide liquors and tails leave here: destroy cyanide before discharge and check against the limits of the site");
  }
  for (const char* noble : {"Ag^+", "Au^+"})
    if (total(noble) > noble_to_watch && molality(noble) * liquor.water_per_volume > 0.5 * total(noble))
      add(cautions, "noble metal without a ligand", liquor.place,
          fmt::format("{:.3g} mg/L of {} stands mostly as the free ion{}: nothing holds it in solution, and in practice it would not dissolve",
                      1000 * total(noble) * chemistry.component_mass[chemistry.find_component(noble)], noble, liquor.when), total(noble));
  if (total("NH3") > 1) watch_gas(library, chemistry, pressure, liquor, "NH3", "ammonia vapour", cautions);
  if (total("Ag^+") > silver_to_watch && ammonia > ammonia_to_watch)
    add(cautions, "silver ammine", liquor.place,
        fmt::format("{:.3g} g/L silver with {:.3g} mol/kg free ammonia{}: on standing, evaporation, heating or with caustic such liquors may form explosive "
                    "silver solids; do not store or dry them, precipitate the silver promptly as chloride or sulfide, wash films off wet",
                    total("Ag^+") * 0.1078682, ammonia, liquor.when),
        total("Ag^+"));
  if (liquor.acid_added && total("NH3") > 1)
    add(cautions, "acid meets ammonia", liquor.place,
        "acid meets ammonia: heat, spitting and, with volatile acids, white smoke of ammonium salts; add acid slowly, cooled, and keep the vents apart");
  if (liquor.acid_added && cyanide > 1e-3)
    add(cautions, "acid meets cyanide", liquor.place, "acid meets cyanide: hydrogen cyanide is set free at once; do not do this outside a gas-tight, scrubbed plant");
  const double most = chemistry.activity->largest_ionic_strength();
  if (liquor.ionic_strength > most)
    add(cautions, "range of the activity model", liquor.place,
        fmt::format("ionic strength {:.3g} mol/kg{} is beyond the range of {} ({:.3g} mol/kg), held there: activity coefficients are those at the end of the range",
                    liquor.ionic_strength, liquor.when, chemistry.activity->name(), most),
        liquor.ionic_strength);
  if (chemistry.activity->name() == "ideal" && liquor.ionic_strength > ideal_up_to)
    add(cautions, "ideal solution", liquor.place,
        fmt::format("activity coefficients are taken as one at an ionic strength of {:.3g} mol/kg{}", liquor.ionic_strength, liquor.when), liquor.ionic_strength);
}

void watch_solids(const Chemistry& chemistry, const std::string& place, std::span<const double> log10_omega, std::vector<Caution>& cautions) {
  std::string list;
  double most = 0;
  for (std::size_t s = 0; s < chemistry.phases.size(); ++s)
    if (!chemistry.phases[s].may_form && log10_omega[s] > scale_from) {
      list += fmt::format("{}{} ({:+.1f})", list.empty() ? "" : ", ", chemistry.phases[s].name, log10_omega[s]);
      most = std::max(most, log10_omega[s]);
    }
  if (!list.empty()) add(cautions, "supersaturated, not allowed to form", place, list + ": scale, or a solid that may_form should name", most);
}

void watch_constants(const Chemistry& chemistry, std::span<const double> temperatures, std::vector<Caution>& cautions) {
  std::string memory, measured, own, cold;
  const auto append = [](std::string& list, const std::string& name) { list += (list.empty() ? "" : ", ") + name; };
  for (const UsedConstant& used : chemistry.constants) {
    const Provenance& from = used.constant.provenance;
    if (from.user) append(own, used.name);
    else if (from.evidence == "from memory") append(memory, used.name);
    if (used.constant.ionic_strength > 0.05) append(measured, fmt::format("{} (I {:.3g})", used.name, used.constant.ionic_strength));
    const bool away = std::any_of(temperatures.begin(), temperatures.end(), [&](double t) { return std::abs(t - used.constant.temperature) > far_from; });
    if (away && !used.constant.enthalpy && used.constant.also_at.empty()) append(cold, used.name);
  }
  if (!own.empty()) add(cautions, "the user's own constants", "", own);
  if (!memory.empty()) add(cautions, "constants from memory", "", memory);
  if (!measured.empty()) add(cautions, "constants measured above zero ionic strength, used as measured", "", measured);
  if (!cold.empty()) add(cautions, "no enthalpy known, used as measured at another temperature", "", cold);
  if (!chemistry.liquor_volume.without_volume().empty()) {
    std::string list;
    for (const std::string& name : chemistry.liquor_volume.without_volume()) append(list, name);
    add(cautions, "density without a volume for", "", list);
  }
}

std::vector<std::string> cautions_in_short(std::span<const Caution> cautions) {
  std::vector<std::string> kinds, lines;
  for (const Caution& one : cautions)
    if (std::find(kinds.begin(), kinds.end(), one.kind) == kinds.end()) kinds.push_back(one.kind);
  for (const std::string& kind : kinds) {
    const Caution* worst = nullptr;
    int places = 0;
    for (const Caution& one : cautions)
      if (one.kind == kind) {
        ++places;
        if (!worst || one.weight > worst->weight) worst = &one;
      }
    lines.push_back(fmt::format("{}: {}{}", kind, worst->text, places > 1 ? fmt::format(" (the worst of {} places, all in the results file)", places) : ""));
  }
  lines.push_back(closing_caution());
  return lines;
}

std::string closing_caution() {
  return "estimates only: no substitute for measurement, a hazard study, local codes and licensed practice";
}

namespace {

// Looks at every vessel, and at every stream that no vessel mixed, of one moment.
void look_at(const SpeciesLibrary& library, const Snapshot& snapshot, bool timed, RunResult& result) {
  const Circuit& circuit = *result.circuit;
  const Chemistry& chemistry = *circuit.chemistry;
  const std::string when = timed ? fmt::format(" at {:.4g} h", snapshot.time / 3600) : "";
  for (std::size_t v = 0; v < snapshot.units.size(); ++v) {
    const UnitSnapshot& unit = snapshot.units[v];
    const std::string& name = circuit.units[result.vessels[v]].name;
    watch_liquor(library, chemistry, result.site_pressure,
                 {name, unit.temperature, unit.ph, unit.ionic_strength, unit.water_per_volume, &unit.molality, &unit.total, false, when}, result.cautions);
    if (!timed) watch_solids(chemistry, name, unit.saturation_index, result.cautions);
    for (std::size_t k = 0; k < circuit.context->lots.size() && !timed; ++k) {
      const int phase = chemistry.find_phase(circuit.context->lots[k].mineral);
      const std::span<const Probe> probes = circuit.context->lots[k].law ? circuit.context->lots[k].law->probes() : std::span<const Probe>{};
      const bool limited = std::any_of(probes.begin(), probes.end(), [](const Probe& probe) { return probe.kind == ProbeKind::saturation; });
      if (phase >= 0 && circuit.context->lots[k].law && !limited && unit.saturation_index[phase] > -1e-6)
        add(result.cautions, "dissolves into a saturated liquor", name,
            fmt::format("{} goes on dissolving by its law although its saturation index is {:+.2f}; write to: saturation", circuit.context->lots[k].name,
                        std::max(0.0, unit.saturation_index[phase])),
            1 + unit.saturation_index[phase]);
    }
  }
  for (std::size_t s = 0; s < snapshot.streams.size(); ++s) {
    const StreamSnapshot& stream = snapshot.streams[s];
    const int source = circuit.streams[s].source;
    if (stream.molality.empty() || source < 0 || circuit.units[source].operation->traits().hold_up) continue;  // reagents as bought are not told
    std::vector<double> dissolved;
    for (int j = 0; j < chemistry.component_count(); ++j) dissolved.push_back(stream.dissolved[j] / stream.liquor_volume);
    watch_liquor(library, chemistry, result.site_pressure,
                 {circuit.streams[s].name, circuit.streams[s].temperature, stream.ph, stream.ionic_strength, stream.water_per_volume, &stream.molality, &dissolved, false, when},
                 result.cautions);
  }
}

// A join that brings acid to ammonia or cyanide.
void look_at_joins(const Snapshot& snapshot, RunResult& result) {
  const Circuit& circuit = *result.circuit;
  const int nh3 = circuit.chemistry->find_component("NH3"), cn = circuit.chemistry->find_component("CN^-");
  for (const CircuitUnit& unit : circuit.units) {
    bool acid = false, ammonia = false, cyanide = false;
    for (int s : unit.takes) {
      const StreamSnapshot& stream = snapshot.streams[s];
      if (std::isnan(stream.ph)) continue;
      acid = acid || stream.ph < acid_stream;
      ammonia = ammonia || (nh3 >= 0 && stream.dissolved[nh3] > 1 * stream.liquor_volume);
      cyanide = cyanide || (cn >= 0 && stream.dissolved[cn] > 1e-3 * stream.liquor_volume);
    }
    if (acid && ammonia) add(result.cautions, "acid meets ammonia", unit.name, "an acid stream meets ammonia: heat, and smoke with volatile acids; keep the vents apart");
    if (acid && cyanide) add(result.cautions, "acid meets cyanide", unit.name, "an acid stream meets cyanide: hydrogen cyanide is set free at once");
  }
}

}  // namespace

void find_cautions(const SpeciesLibrary& library, RunResult& result) {
  const Circuit& circuit = *result.circuit;
  if (result.steady_ok) {
    look_at(library, result.steady, false, result);
    look_at_joins(result.steady, result);
    for (std::size_t e = 0; e < result.recovered.size(); ++e)
      if (result.steady.recovery_now[e] > 1 + 1e-6)
        add(result.cautions, "more recovered than the solids bring", "",
            fmt::format("{} {:.4g} %: recovery counts what the solids bring in, and liquors bring some too", circuit.elements[result.recovered[e]], 100 * result.steady.recovery_now[e]));
  }
  for (const Snapshot& row : result.history) look_at(library, row, true, result);
  for (const std::string& mineral : result.at_equilibrium)
    add(result.cautions, "at equilibrium", mineral, "fed without a law: it is taken to be at equilibrium in every vessel and stream");
  const CircuitStream& pregnant = circuit.streams[circuit.pregnant_liquor];
  if (pregnant.taker >= 0)
    add(result.cautions, "recovery read inside the circuit", "",
        pregnant.name + " goes on to " + circuit.units[pregnant.taker].name + ": metal that comes back through it is counted again");
  std::vector<double> temperatures;
  for (const CircuitUnit& unit : circuit.units) temperatures.push_back(unit.operation->temperature());
  watch_constants(*circuit.chemistry, temperatures, result.cautions);
}

}  // namespace leat
