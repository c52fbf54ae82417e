// sim/input: the flowsheet and beaker files, every field read and every fault with its place.
#include <fmt/format.h>
#include <gtest/gtest.h>

#include <string>
#include <vector>

#include "models/register/register_models.hpp"
#include "sim/input/read_beaker.hpp"
#include "sim/input/read_flowsheet.hpp"

namespace leat {
namespace {

const Catalogue& catalogue() {
  static const Catalogue made = register_models();
  return made;
}

constexpr const char* plant = R"(leat: 1
kind: flowsheet
title: A small plant (invented)
site: {altitude: 2900 m, air_temperature: 18 degC}
chemistry:
  families: [cyano, hydroxo]
  activity: ideal
  may_form: [calcite]
  forms_slowly: [tenorite]
  only: [CN^-, HCN]
  density: one_kg_water_per_litre
  debye_huckel_a: 0.51
  constants:
    "Ag(CN)2^-": {log10_beta: 20.5, temperature: 25 degC, enthalpy: -138 kJ/mol, source: common practice, note: rounded}
    newsalt: {log10_solubility: -9.7, reaction: newsalt = A^+ + B^-, source: bench sheet 4}
liquors:
  site_water:
    ions: {Ca: 180 mg/L, Cl: 140 mg/L}
    pH: 7.6
    balance_with: Na
    temperature: 18 degC
    NaCN: 600 mg/L as CN^-
  same: site_water
  plain: water
solids:
  ore:
    phases: {gold: 2.1 g/t, chalcocite: 0.47 %, gangue: 10 %, quartz: rest}
    inert: [quartz, gangue]
    moisture: 3 %
    moisture_liquor: site_water
    gangue_density: 2.7 t/m3
  dried: {phases: {gold: 100 %}}
leaching:
  gold:
    oxidant: O2
    reaction: Au + 2 CN^- = Au(CN)2^- + e^-
    at: {CN^-: 400 mg/L as NaCN, O2: 6 mg/L, temperature: 18 degC}
    orders: {CN^-: 0.5, O2: 0.3}
    activation_energy: 35 kJ/mol
    parts: {fast: {share: 80 %, law: first_order, constant: 0.35 1/h}, slow: {share: 13 %, law: at_once}, locked: {law: inert}}
  chalcocite: {law: first_order, constant: 0.8 1/h, to: saturation, ultimate_extraction: 85 %, reductant: CN^- to OCN^-}
  quartz: {law: inert}
reagents:
  cyanide: {made_of: {NaCN: 30 %, water: rest}, counted_as: NaCN}
streams:
  feed: {solids: ore, rate: 100 t/h, rate_basis: dry, temperature: 20 degC}
  pulp: {solids: dried, rate: 2 t/h, rate_basis: wet, liquor: water, solids_fraction: 45 %}
  fresh: {liquor: {NaCl: 10 g/L}, rate: 81.8 m3/h, temperature: 15 degC}
  dose: {reagent: cyanide, rate: 50 kg/h}
  air: {gas: air}
circuit:
  R: {unit: mixer, takes: [feed, pulp, S.mill]}
  L: {unit: train, tanks: 8, volume: 714 m3, temperature: 25 degC, takes: R, gas: {takes: air, kla: 6 1/h}, also_takes: {1: dose, 3: [fresh, S.wash]}}
  T: {unit: thickener, takes: L.pulp, solids_fraction: 55 %}
  S: {unit: splitter, takes: T.overflow, wash: 122.7 m3/h, bleed: 5 %, mill: rest}
leaves: {tails: T.underflow, effluent: S.bleed}
pregnant_liquor: T.overflow
history: {start: {all: same, L.2: {NaCl: 1 g/L}}, until: 168 h, every: 15 min}
)";

constexpr const char* bench = R"(leat: 1
kind: beaker
title: Silver in ammonia (invented)
chemistry: {families: [ammine], may_form: []}
beaker:
  liquor: {NH3: 4.5 mol/L, NaCl: 10 g/L}
  volume: 2 L
  temperature: 30 degC
  add: {chlorargyrite: 80 g, NaOH: 0.5 mol, water: 0.1 L}
  pH: 9.5
  gas: {CO2: 40 Pa, NH3: 1 kPa}
steps:
  - {name: taken up}
  - {name: acidified, add: {H2SO4: 4.1 mol}, as: {H2SO4: 96 %, water: rest}}
  - {name: to a pH, until: {pH: 2.0}, with: H2SO4}
  - {name: filtered, filter_off: all}
  - {name: warmed, add: {water: 1 L}, heat_to: 60 degC}
)";

std::string listed(const Diagnostics& diagnostics) {
  std::string all;
  for (const Diagnostic& fault : diagnostics.sorted_faults()) all += to_string(fault) + "\n";
  return all;
}

// A text with one piece in place of another, which stands in it exactly once.
std::string with(const std::string& text, const std::string& piece, const std::string& other) {
  const std::size_t at = text.find(piece);
  EXPECT_NE(at, std::string::npos) << piece;
  if (at == std::string::npos) return text;
  EXPECT_EQ(text.find(piece, at + 1), std::string::npos) << piece << " stands there twice";
  return std::string(text).replace(at, piece.size(), other);
}

Flowsheet read_plant(const std::string& text = plant) {
  Diagnostics diagnostics;
  const auto flowsheet = read_flowsheet(text, "p.yaml", catalogue(), diagnostics);
  EXPECT_TRUE(diagnostics.ok()) << listed(diagnostics);
  return flowsheet.value_or(Flowsheet{});
}

// What was read, in one line: "180 mg/L as X @18", the last the line of its place.
std::string shown(const TypedAmount& a) {
  const std::string as = a.as.empty() ? "" : " as " + a.as;
  return (a.rest ? "rest" : fmt::format("{} {}{}", a.quantity.number, a.quantity.unit, as)) + fmt::format(" @{}", a.place.line);
}
std::string shown(const NamedAmount& a) { return a.name + ": " + shown(a.amount); }
std::string shown(const SolidPhaseSpec& a) { return a.mineral + ": " + shown(a.share); }
std::string shown(const OutletSpec& a) { return a.name + ": " + shown(a.share); }
std::string shown(const std::pair<std::string, Place>& a) { return fmt::format("{} @{}", a.first, a.second.line); }
std::string shown(const std::pair<std::string, double>& a) { return fmt::format("{}: {}", a.first, a.second); }
std::string shown(const std::pair<const std::string, TypedAmount>& a) { return a.first + ": " + shown(a.second); }
std::string shown(const std::string& a) { return a; }
std::string shown(const std::optional<double>& a) { return a ? fmt::format("{:.10g}", *a) : "none"; }
template <class Many>
std::string all_of(const Many& many) {
  std::string all;
  for (const auto& one : many) all += (all.empty() ? "" : ", ") + shown(one);
  return all;
}
std::string shown(const LiquorSpec& a) {
  return fmt::format("[{}] named '{}' water {} pH {} T {} balance '{}' @{}", all_of(a.contents), a.named, a.water, shown(a.ph), shown(a.temperature),
                     a.balance_with, a.place.line);
}
std::string shown(const OverrideSpec& a) {
  return fmt::format("{} beta {} solubility {} k {} T {} H {} reaction '{}' source '{}' note '{}' @{}", a.name, shown(a.log10_beta),
                     shown(a.log10_solubility), shown(a.log10_k), shown(a.temperature), shown(a.enthalpy), a.reaction, a.source, a.note, a.place.line);
}
std::string shown(const LawSpec& a) {
  return fmt::format("{} [{}] to '{}' ultimate {} at [{}] orders [{}] @{} @{}", a.law, all_of(a.parameters), a.to, shown(a.ultimate_extraction),
                     all_of(a.at), all_of(a.orders), a.place.line, a.orders_place.line);
}
std::string shown(const PartSpec& a) { return fmt::format("{} {:.10g} {} @{}", a.name, a.share, shown(a.law), a.place.line); }
std::string shown(const LeachingSpec& a) {
  return fmt::format("{}: {} oxidant '{}' reductant '{}' @{} reaction '{}' @{}", a.mineral, shown(a.law), a.oxidant, a.reductant, a.oxidant_place.line,
                     a.reaction, a.place.line);
}
std::string shown(const StreamSpec& a) {
  return fmt::format("{}: solids '{}' reagent '{}' gas {} rate {} dry {} fraction {} T {} liquor {} @{}", a.name, a.solids, a.reagent, a.gas, shown(a.rate),
                     a.rate_dry, shown(a.solids_fraction), shown(a.temperature), a.liquor ? shown(*a.liquor) : "none", a.place.line);
}
std::string shown(const UnitSpec& a) {
  std::string members;
  for (const auto& [member, takes] : a.member_takes) members += fmt::format("{}: {}; ", member, all_of(takes));
  const std::string gas = a.gas ? fmt::format("{} {:.6g} @{}", a.gas->takes, a.gas->transfer, a.gas->place.line) : "none";
  return fmt::format("{}: {} x {} takes [{}] [{}] T {} gas {} outlets [{}] members [{}] @{}:{}", a.name, a.kind, a.count, all_of(a.takes),
                     all_of(a.parameters), shown(a.temperature), gas, all_of(a.outlets), members, a.place.line, a.kind_place.column);
}
std::string shown(const StepSpec& a) {
  return fmt::format("{}: add [{}] as [{}] until {} with '{}' filter {} heat {} @{}", a.name, all_of(a.add), all_of(a.as), shown(a.until_ph), a.with,
                     a.filter_off, shown(a.heat_to), a.place.line);
}
std::string shown(const ChemistrySpec& a) {
  return fmt::format("families [{}] may_form {} [{}] slowly [{}] only [{}] activity {} @{} litre {} A {} @{}", all_of(a.families), a.may_form_given,
                     all_of(a.may_form), all_of(a.forms_slowly), all_of(a.only), a.activity, a.activity_place.line, a.one_kg_water_per_litre,
                     a.debye_huckel_a, a.place.line);
}

TEST(read_flowsheet, reads_the_head_and_the_chemistry) {
  const Flowsheet f = read_plant();
  EXPECT_EQ(f.file, "p.yaml");
  EXPECT_EQ(f.text, plant);
  EXPECT_EQ(f.title, "A small plant (invented)");
  EXPECT_EQ(f.place.line, 1);
  EXPECT_DOUBLE_EQ(f.altitude, 2900);
  EXPECT_EQ(shown(f.air_temperature), "291.15");
  EXPECT_EQ(shown(f.chemistry), "families [cyano, hydroxo] may_form true [calcite] slowly [tenorite] only [CN^-, HCN] activity ideal @7 litre true A 0.51 @6");
  ASSERT_EQ(f.chemistry.constants.size(), 2u);
  EXPECT_EQ(shown(f.chemistry.constants[0]),
            "Ag(CN)2^- beta 20.5 solubility none k none T 298.15 H -138000 reaction '' source 'common practice' note 'rounded' @14");
  EXPECT_EQ(shown(f.chemistry.constants[1]),
            "newsalt beta none solubility -9.7 k none T none H none reaction 'newsalt = A^+ + B^-' source 'bench sheet 4' note '' @15");
}

TEST(read_flowsheet, reads_materials) {
  const Flowsheet f = read_plant();
  ASSERT_EQ(f.liquors.size(), 3u);
  EXPECT_EQ(shown(f.liquors.at("site_water")),
            "[Ca: 180 mg/L @18, Cl: 140 mg/L @18, NaCN: 600 mg/L as CN^- @22] named '' water false pH 7.6 T 291.15 balance 'Na' @18");
  EXPECT_EQ(shown(f.liquors.at("same")), "[] named 'site_water' water false pH none T none balance '' @23");
  EXPECT_EQ(shown(f.liquors.at("plain")), "[] named '' water true pH none T none balance '' @24");
  ASSERT_EQ(f.solids.size(), 2u);
  const SolidsSpec& ore = f.solids[0];
  EXPECT_EQ(ore.name + ": " + all_of(ore.phases), "ore: gold: 2.1 g/t @27, chalcocite: 0.47 % @27, gangue: 10 % @27, quartz: rest @27");
  EXPECT_EQ(all_of(ore.inert), "quartz, gangue");
  EXPECT_DOUBLE_EQ(ore.moisture, 0.03);
  EXPECT_EQ(ore.moisture_liquor.named, "site_water");
  EXPECT_EQ(ore.moisture_place.line, 29);
  EXPECT_DOUBLE_EQ(ore.gangue_density, 2700);
  EXPECT_EQ(ore.place.line, 26);
  EXPECT_EQ(f.solids[1].moisture + f.solids[1].gangue_density, 0);
  ASSERT_EQ(f.reagents.size(), 1u);
  EXPECT_EQ(f.reagents[0].name + ": " + all_of(f.reagents[0].made_of), "cyanide: NaCN: 30 % @44, water: rest @44");
  EXPECT_EQ(f.reagents[0].counted_as, "NaCN");
  EXPECT_EQ(f.reagents[0].place.line, 44);
}

TEST(read_flowsheet, reads_leaching_and_hands_it_to_parts) {
  const Flowsheet f = read_plant();
  ASSERT_EQ(f.leaching.size(), 3u);
  const std::string shared = "at [CN^-: 400 mg/L as NaCN @37, O2: 6 mg/L @37, temperature: 18 degC @37] orders [CN^-: 0.5, O2: 0.3]";
  const std::string energy = "activation_energy: 35 kJ/mol @39";
  EXPECT_EQ(shown(f.leaching[0]), "gold:  [" + energy + "] to '' ultimate none " + shared +
                                      " @34 @38 oxidant 'O2' reductant '' @35 reaction 'Au + 2 CN^- = Au(CN)2^- + e^-' @34");
  ASSERT_EQ(f.leaching[0].parts.size(), 3u);
  EXPECT_EQ(shown(f.leaching[0].parts[0]), "fast 0.8 first_order [" + energy + ", constant: 0.35 1/h @40] to '' ultimate none " + shared + " @40 @38 @40");
  EXPECT_EQ(shown(f.leaching[0].parts[1]), "slow 0.13 at_once [] to '' ultimate none " + shared + " @40 @38 @40");  // it has no activation energy
  EXPECT_EQ(shown(f.leaching[0].parts[2]), "locked 0.07 inert [] to '' ultimate none at [] orders [] @40 @0 @40");
  EXPECT_EQ(shown(f.leaching[1]), "chalcocite: first_order [constant: 0.8 1/h @41] to 'saturation' ultimate 0.85 at [] orders [] @41 @0 oxidant '' "
                                  "reductant 'CN^- to OCN^-' @41 reaction '' @41");
  EXPECT_TRUE(f.leaching[1].parts.empty());
  EXPECT_EQ(f.leaching[2].law.law, "inert");
}

TEST(read_flowsheet, reads_streams) {
  const Flowsheet f = read_plant();
  const std::string water = "[] named '' water true pH none T none balance '' @47";
  const std::string salt = "[NaCl: 10 g/L @48] named '' water false pH none T none balance '' @48";
  ASSERT_EQ(f.streams.size(), 5u);
  EXPECT_EQ(shown(f.streams[0]), "feed: solids 'ore' reagent '' gas false rate 100 t/h @46 dry true fraction none T 293.15 liquor none @46");
  EXPECT_EQ(shown(f.streams[1]), "pulp: solids 'dried' reagent '' gas false rate 2 t/h @47 dry false fraction 0.45 T none liquor " + water + " @47");
  EXPECT_EQ(shown(f.streams[2]), "fresh: solids '' reagent '' gas false rate 81.8 m3/h @48 dry false fraction none T 288.15 liquor " + salt + " @48");
  EXPECT_EQ(shown(f.streams[3]), "dose: solids '' reagent 'cyanide' gas false rate 50 kg/h @49 dry false fraction none T none liquor none @49");
  EXPECT_EQ(shown(f.streams[4]), "air: solids '' reagent '' gas true rate 0  @0 dry false fraction none T none liquor none @50");
}

TEST(read_flowsheet, reads_the_circuit_and_the_history) {
  const Flowsheet f = read_plant();
  ASSERT_EQ(f.units.size(), 4u);
  EXPECT_EQ(shown(f.units[0]), "R: mixer x 1 takes [feed @52, pulp @52, S.mill @52] [] T none gas none outlets [] members [] @52:13");
  EXPECT_EQ(shown(f.units[1]), "L: train x 8 takes [R @53] [volume: 714 m3 @53] T 298.15 gas air 0.00166667 @53 outlets [] "
                               "members [1: dose @53; 3: fresh @53, S.wash @53; ] @53:13");
  EXPECT_EQ(shown(f.units[2]), "T: thickener x 1 takes [L.pulp @54] [solids_fraction: 55 % @54] T none gas none outlets [] members [] @54:13");
  EXPECT_EQ(shown(f.units[3]), "S: splitter x 1 takes [T.overflow @55] [] T none gas none outlets [wash: 122.7 m3/h @55, bleed: 5 % @55, mill: rest @55] "
                               "members [] @55:13");
  ASSERT_EQ(f.leaves.size(), 2u);
  EXPECT_EQ(f.leaves[1].name + ": " + f.leaves[1].stream, "effluent: S.bleed");
  EXPECT_EQ(f.leaves[1].place.line, 56);
  EXPECT_EQ(f.pregnant_liquor, "T.overflow");
  EXPECT_EQ(f.pregnant_place.line, 57);
  ASSERT_TRUE(f.history && f.history->fillings.size() == 2);
  EXPECT_FALSE(f.history->from_steady);
  EXPECT_DOUBLE_EQ(f.history->until, 168 * 3600.0);
  EXPECT_DOUBLE_EQ(f.history->every, 900);
  EXPECT_EQ(f.history->place.line, 58);
  EXPECT_EQ(f.history->fillings[0].unit + ": " + f.history->fillings[0].liquor.named, "all: same");
  EXPECT_EQ(f.history->fillings[1].unit + ": " + all_of(f.history->fillings[1].liquor.contents), "L.2: NaCl: 1 g/L @58");
  const std::string start = "{all: same, L.2: {NaCl: 1 g/L}}";
  EXPECT_TRUE(read_plant(with(plant, start, "steady")).history->from_steady);
  const Flowsheet named = read_plant(with(plant, start, "water"));
  ASSERT_EQ(named.history->fillings.size(), 1u);
  EXPECT_EQ(named.history->fillings[0].unit, "all");
  EXPECT_TRUE(named.history->fillings[0].liquor.water);
}

TEST(read_flowsheet, reads_the_smallest_file) {
  const Flowsheet f = read_plant("leat: 1\nkind: flowsheet\nstreams: {a: {liquor: water, rate: 1 t/h}}\n"
                                 "circuit: {P: {unit: surge, volume: 2 m3, temperature: 20 degC, takes: a}}\npregnant_liquor: P\n");
  EXPECT_EQ(shown(f.chemistry), "families [] may_form false [] slowly [] only [] activity davies @0 litre false A 0 @0");
  EXPECT_FALSE(f.air_temperature || f.history);
  EXPECT_EQ(f.units.at(0).kind, "surge");
}

TEST(read_beaker, reads_every_key) {
  Diagnostics diagnostics;
  const BeakerSpec b = read_beaker(bench, "b.yaml", catalogue(), diagnostics).value();
  ASSERT_TRUE(diagnostics.ok()) << listed(diagnostics);
  EXPECT_EQ(b.file, "b.yaml");
  EXPECT_EQ(b.text, bench);
  EXPECT_EQ(b.title, "Silver in ammonia (invented)");
  EXPECT_EQ(shown(b.chemistry), "families [ammine] may_form true [] slowly [] only [] activity davies @4 litre false A 0 @4");
  EXPECT_EQ(shown(b.liquor), "[NH3: 4.5 mol/L @6, NaCl: 10 g/L @6] named '' water false pH none T none balance '' @6");
  EXPECT_DOUBLE_EQ(b.volume, 2e-3);
  EXPECT_DOUBLE_EQ(b.temperature, 303.15);
  EXPECT_EQ(all_of(b.add), "chlorargyrite: 80 g @9, NaOH: 0.5 mol @9, water: 0.1 L @9");
  EXPECT_EQ(shown(b.held_ph), "9.5");
  ASSERT_EQ(b.gases.size(), 2u);
  EXPECT_DOUBLE_EQ(b.gases.at("CO2").first, 40);
  EXPECT_DOUBLE_EQ(b.gases.at("NH3").first, 1000);
  EXPECT_EQ(b.gases.at("NH3").second.line, 11);
  ASSERT_EQ(b.steps.size(), 5u);
  EXPECT_EQ(shown(b.steps[0]), "taken up: add [] as [] until none with '' filter false heat none @13");
  EXPECT_EQ(shown(b.steps[1]), "acidified: add [H2SO4: 4.1 mol @14] as [H2SO4: 96 % @14, water: rest @14] until none with '' filter false heat none @14");
  EXPECT_EQ(shown(b.steps[2]), "to a pH: add [] as [] until 2 with 'H2SO4' filter false heat none @15");
  EXPECT_EQ(shown(b.steps[3]), "filtered: add [] as [] until none with '' filter true heat none @16");
  EXPECT_EQ(shown(b.steps[4]), "warmed: add [water: 1 L @17] as [] until none with '' filter false heat 333.15 @17");
  EXPECT_TRUE(read_beaker(with(bench, "{CO2: 40 Pa, NH3: 1 kPa}", "none"), "b.yaml", catalogue(), diagnostics)->gases.empty());
  EXPECT_TRUE(diagnostics.ok()) << listed(diagnostics);
}

// One piece of a good file changed, and the one fault it makes.
struct Bad {
  const char* piece;
  const char* other;
  int line;
  const char* code;
  const char* text;  // part of the fault
};

void expect_fault(const Diagnostics& diagnostics, const Bad& bad) {
  ASSERT_EQ(diagnostics.faults().size(), 1u) << bad.other << "\n" << listed(diagnostics);
  const Diagnostic& fault = diagnostics.faults()[0];
  EXPECT_EQ(fault.place.line, bad.line) << bad.other << "\n" << to_string(fault);
  EXPECT_GT(fault.place.column, 0) << to_string(fault);
  EXPECT_EQ(code_name(fault.code), bad.code) << to_string(fault);
  EXPECT_NE(fault.text.find(bad.text), std::string::npos) << bad.other << "\n" << to_string(fault);
}

void expect_bad_plant(std::initializer_list<Bad> rows) {
  for (const Bad& bad : rows) {
    Diagnostics diagnostics;
    const auto read = read_flowsheet(with(plant, bad.piece, bad.other), "p.yaml", catalogue(), diagnostics);
    EXPECT_TRUE(read) << bad.other;
    expect_fault(diagnostics, bad);
  }
}

TEST(read_flowsheet, refuses_a_bad_head) {
  expect_bad_plant({
      {"leat: 1\n", "leat: 2\n", 1, "out_of_range", "2 is out of range; allowed is 1 to 1"},
      {"leat: 1\n", "leat: 1.0\n", 1, "bad_quantity", "not a whole number"},
      {"kind: flowsheet", "kind: beaker", 2, "unknown_name", "of kind 'beaker'; flowsheet is needed"},
      {"title: A small plant (invented)", "titel: A small plant", 3, "unknown_key", "did you mean 'title'?"},
      {"altitude: 2900 m", "altitude: 2900", 4, "wrong_unit", "has no unit; a length is needed"},
      {"altitude: 2900 m", "altitude: 29 km", 4, "out_of_range", "-500 to 6000 m"},
      {"air_temperature: 18 degC", "air_temperature: 18 K", 4, "out_of_range", "200 to 500 K"},
      {"pregnant_liquor: T.overflow\n", "\n", 1, "missing_key", "'pregnant_liquor' is needed"},
      {"pregnant_liquor: T.overflow", "pregnant_liquor: [T.overflow]", 57, "wrong_kind", "a text is needed"},
      {"leaves: {tails: T.underflow, effluent: S.bleed}", "leaves: [T.underflow]", 56, "wrong_kind", "a map of 'key: value' is needed"},
  });
}

TEST(read_flowsheet, refuses_bad_chemistry) {
  expect_bad_plant({
      {"activity: ideal", "activity: daveis", 7, "unknown_name", "did you mean 'davies'? Allowed: davies, ideal"},
      {"families: [cyano, hydroxo]", "families: [cyano, cyano]", 6, "duplicate", "'cyano' is named twice"},
      {"  may_form: [calcite]", "  may_from: [calcite]", 8, "unknown_key", "did you mean 'may_form'?"},
      {"density: one_kg_water_per_litre", "density: pure", 11, "unknown_name", "allowed: one_kg_water_per_litre"},
      {"debye_huckel_a: 0.51", "debye_huckel_a: 0.51 kg/mol", 12, "bad_quantity", "a plain number is needed"},
      {"log10_beta: 20.5, ", "", 14, "missing_key", "needs one of log10_beta, log10_solubility and log10_k"},
      {"log10_beta: 20.5, ", "log10_beta: 20.5, log10_k: 3, ", 14, "duplicate", "has log10_beta and log10_k"},
      {"enthalpy: -138 kJ/mol", "enthalpy: -138 kJ", 14, "wrong_unit", "-138 kJ is not an energy per amount"},
      {", source: bench sheet 4", "", 15, "missing_key", "'source' is needed"},
  });
}

TEST(read_flowsheet, refuses_bad_liquors) {
  expect_bad_plant({
      {"Ca: 180 mg/L", "Ca: 180", 18, "wrong_unit", "'180' has no unit; a concentration is needed"},
      {"Ca: 180 mg/L", "Ca: 180 s", 18, "wrong_unit", "'180 s' is not a concentration"},
      {"Ca: 180 mg/L", "Ca: 180 mgL", 18, "bad_quantity", "'mgL'"},
      {"Ca: 180 mg/L", "Ca: -180 mg/L", 18, "out_of_range", "0 or more"},
      {"Ca: 180 mg/L", "Ca: rest", 18, "bad_quantity", "'rest' cannot stand here"},
      {"Ca: 180 mg/L", "Ca: [180 mg/L]", 18, "wrong_kind", "a list stands here; a concentration is needed"},
      {"pH: 7.6", "pH: 15", 19, "out_of_range", "0 to 14"},
      {"600 mg/L as CN^-", "600 mg/L as", 22, "bad_quantity", "does not name one compound behind 'as'"},
      {"600 mg/L as CN^-", "600 mg/L as CN^- total", 22, "bad_quantity", "does not name one compound behind 'as'"},
      {"    NaCN: 600 mg/L as CN^-", "    Ca: 1 mg/L", 22, "duplicate", "'Ca' is given twice; it stands already in line 18"},
      {"    NaCN: 600 mg/L as CN^-", "    water: 1 kg", 22, "unknown_key", "water is not typed in a liquor"},
      {"same: site_water", "same: site_watr", 23, "unknown_name", "did you mean 'site_water'?"},
      {"same: site_water", "same: same", 23, "unknown_name", "leads back to itself"},
      {"  plain: water", "  water: site_water", 24, "duplicate", "'water' has a meaning of its own"},
      {"  plain: water", "  \"a.b\": water", 24, "bad_data", "'a.b' cannot be a name"},
      {"  plain: water", "  plain: {}", 24, "missing_key", "the liquor holds nothing"},
  });
}

TEST(read_flowsheet, refuses_bad_solids_and_reagents) {
  expect_bad_plant({
      {"gangue: 10 %", "gangue: 100 %", 27, "does_not_close", "the shares sum to 100.47021 %, more than 100 %"},
      {"gangue: 10 %", "gangue: rest", 27, "does_not_close", "only one share can be the rest"},
      {"quartz: rest", "quartz: 89.4 %", 27, "does_not_close", "the shares sum to 99.87021 %; they must make 100 %"},
      {"gold: 2.1 g/t", "gold: 2.1", 27, "wrong_unit", "'2.1' has no unit; a share of the mass is needed"},
      {"gold: 2.1 g/t", "gold: 2.1 g/t as Au", 27, "bad_quantity", "'as' has no meaning here"},
      {"inert: [quartz, gangue]", "inert: [quarz, gangue]", 28, "unknown_name", "did you mean 'quartz'?"},
      {"moisture: 3 %", "moisture: 95 %", 29, "out_of_range", "0 to 0.9"},
      {"    moisture: 3 %\n", "\n", 30, "missing_key", "without moisture"},
      {"    moisture_liquor: site_water\n", "\n", 29, "missing_key", "needs moisture_liquor"},
      {"moisture_liquor: site_water", "moisture_liquor: tap", 30, "unknown_name", "'tap' is not the name of a liquor; there is: site_water, same, plain, water"},
      {"    gangue_density: 2.7 t/m3\n", "\n", 27, "missing_key", "needs gangue_density"},
      {"dried: {phases: {gold: 100 %}}", "dried: {phases: {gold: 100 %}, gangue_density: 2 t/m3}", 32, "unknown_key", "no phase is named gangue"},
      {"dried: {phases: {gold: 100 %}}", "dried: {inert: [gold]}", 32, "missing_key", "'phases' is needed"},
      {"NaCN: 30 %, water: rest", "NaCN: 30 %", 44, "does_not_close", "the shares sum to 30 %"},
      {"counted_as: NaCN", "counted_in: NaCN", 44, "unknown_key", "did you mean 'counted_as'?"},
  });
}

TEST(read_flowsheet, refuses_bad_leaching) {
  expect_bad_plant({
      {"law: first_order, constant: 0.8 1/h", "law: frist_order, constant: 0.8 1/h, control: surface", 41, "unknown_name", "did you mean 'first_order'? Allowed: inert, at_once, first_order"},
      {"law: first_order, constant: 0.8 1/h, ", "constant: 0.8 1/h, ", 41, "missing_key", "'chalcocite' needs a law: inert, at_once, first_order"},
      {"law: first_order, constant: 0.8 1/h", "law: first_order", 41, "missing_key", "needs its constant, the rate constant at the conditions of `at`; write for example constant: 20 1/h"},
      {"constant: 0.8 1/h", "constant: 0.8", 41, "wrong_unit", "'0.8' has no unit; a rate per time is needed"},
      {"constant: 0.8 1/h", "constant: 0.8 h", 41, "wrong_unit", "is not a rate per time"},
      {"constant: 0.8 1/h", "constant: 0.8 1/h, at_temperature: 25 degC", 41, "unknown_key", "'at_temperature' is not a key here"},
      {"constant: 0.8 1/h", "constant: 0.8 1/h, within: 10 s", 41, "unknown_key", "'within' is not a key here"},
      {"constant: 0.8 1/h", "constant: 0.8 1/h, orders: {O2: 1}", 41, "missing_key", "the order in O2 needs the concentration"},
      {"constant: 0.8 1/h", "constant: 0.8 1/h, activation_energy: 5 kJ/mol", 41, "missing_key", "needs the temperature at which the constant was measured"},
      {"to: saturation", "to: completion", 41, "unknown_name", "allowed: saturation"},
      {"ultimate_extraction: 85 %", "ultimate_extraction: 185 %", 41, "out_of_range", "185 % is out of range"},
      {"quartz: {law: inert}", "quartz: {law: inert, constant: 1 1/h}", 42, "unknown_key", "'constant' is not a key here"},
      {"    oxidant: O2\n", "    ultimate_extraction: 90 %\n", 35, "duplicate", "ultimate_extraction and parts both"},
      {"O2: 6 mg/L", "O2: 6 %", 37, "wrong_unit", "'6 %' is not a concentration"},
      {"temperature: 18 degC}\n    orders", "temperature: 18 C}\n    orders", 37, "bad_quantity", "write degC"},
      {"orders: {CN^-: 0.5", "orders: {CN^-: 0.5 %", 38, "bad_quantity", "a plain number is needed"},
      {"share: 80 %", "share: 90 %", 40, "does_not_close", "the shares of the parts sum to 103 %"},
      {"share: 13 %, ", "", 40, "does_not_close", "the parts slow and locked have no share"},
      {"locked: {law: inert}", "locked: {share: 6 %, law: inert}", 40, "does_not_close", "the shares of the parts sum to 99 %"},
      {"law: first_order, constant: 0.35 1/h", "law: first_order", 40, "missing_key", "'gold.fast': the law first_order needs its constant"},
      {"law: first_order, constant: 0.35 1/h", "constant: 0.35 1/h", 40, "missing_key", "'gold.fast' needs a law"},
      {"locked: {law: inert}", "locked: {law: inert, to: saturation}", 40, "unknown_key", "allowed: law, share"},
  });
}

TEST(read_flowsheet, refuses_bad_streams) {
  expect_bad_plant({
      {"feed: {solids: ore", "feed: {solids: oer", 46, "unknown_name", "did you mean 'ore'?"},
      {"rate: 100 t/h, rate_basis: dry", "rate: 100 t/h", 46, "missing_key", "needs rate_basis: dry or wet"},
      {"rate_basis: dry", "rate_basis: damp", 46, "unknown_name", "dry, wet"},
      {"rate: 100 t/h", "rate: 100 m3/h", 46, "wrong_unit", "'100 m3/h' is not a mass flow"},
      {"rate: 100 t/h, rate_basis: dry", "rate_basis: dry", 46, "missing_key", "'rate' is needed"},
      {"rate_basis: dry", "rate_basis: dry, liquor: water", 46, "missing_key", "need solids_fraction"},
      {"rate_basis: dry", "rate_basis: dry, liquor: water, solids_fraction: 40 %", 46, "duplicate", "'ore' has a moisture (line 29)"},
      {"liquor: water, solids_fraction", "solids_fraction", 47, "missing_key", "solids_fraction needs the liquor"},
      {"solids: dried", "solids: dried, reagent: cyanide", 47, "duplicate", "'pulp' has solids and liquor and reagent"},
      {"liquor: {NaCl: 10 g/L}, ", "", 48, "missing_key", "'fresh' has none of them"},
      {"rate: 81.8 m3/h", "rate: 81.8 m3/h, rate_basis: wet", 48, "unknown_key", "allowed: liquor, rate, temperature"},
      {"reagent: cyanide", "reagent: cyanid", 49, "unknown_name", "did you mean 'cyanide'?"},
      {"rate: 50 kg/h", "rate: as_needed", 49, "bad_quantity", "does not start with a number"},
      {"air: {gas: air}", "air: {gas: oxygen}", 50, "unknown_name", "allowed: air"},
  });
}

TEST(read_flowsheet, refuses_a_bad_circuit) {
  expect_bad_plant({
      {"unit: mixer", "unit: mixr", 52, "unknown_name", "did you mean 'mixer'?"},
      {"R: {unit: mixer, ", "R: {", 52, "missing_key", "'unit' is needed"},
      {", takes: [feed, pulp, S.mill]", "", 52, "missing_key", "'takes' is needed"},
      {"[feed, pulp, S.mill]", "[feed, feed]", 52, "duplicate", "'feed' is taken twice here"},
      {"[feed, pulp, S.mill]", "{feed: 1}", 52, "wrong_kind", "a list of names is needed"},
      {"[feed, pulp, S.mill]", "[feed], volume: 3 m3", 52, "unknown_key", "'volume' is not a key here"},
      {"  R: {unit", "  feed: {unit", 52, "duplicate", "'feed' names a stream already"},
      {"  R: {unit", "  all: {unit", 52, "duplicate", "stands for every vessel"},
      {"tanks: 8, ", "", 53, "missing_key", "'tanks' is needed"},
      {"tanks: 8", "tanks: 201", 53, "out_of_range", "1 to 200"},
      {"tanks: 8", "tanks: 2", 53, "out_of_range", "'3' is not the number of a member of L; allowed is 1 to 2"},
      {"{1: dose", "{1-3: dose", 53, "out_of_range", "'1-3' is not the number of a member"},
      {"volume: 714 m3, ", "", 53, "missing_key", "'L': a train needs its volume, the live pulp volume; write for example volume: 120 m3"},
      {"volume: 714 m3", "volume: 714", 53, "wrong_unit", "'714' has no unit; a volume is needed"},
      {"volume: 714 m3", "volume: 714 t", 53, "wrong_unit", "714 t is not a volume"},
      {"volume: 714 m3", "volume: 0 m3", 53, "out_of_range", "1e-06 to 1000000"},
      {", temperature: 25 degC, takes: R", ", takes: R", 53, "missing_key", "needs its temperature"},
      {"gas: {takes: air, ", "gas: {takes: oxygen, ", 53, "unknown_name", "'oxygen' is not the name of a gas stream; there is: air"},
      {"kla: 6 1/h", "kla: 6 h", 53, "wrong_unit", "is not a rate per time"},
      {", kla: 6 1/h", "", 53, "missing_key", "'kla' is needed"},
      {"solids_fraction: 55 %", "solids_fraction: 0.55", 54, "wrong_unit", "'0.55' has no unit; a ratio is needed"},
      {"solids_fraction: 55 %", "solids_fraction: 99 %", 54, "out_of_range", "0.01 to 0.95"},
      {"takes: L.pulp, ", "takes: L.pulp, gas: {takes: air, kla: 1 1/h}, ", 54, "unknown_key", "'gas' is not a key here"},
      {"mill: rest", "mill: 95 %", 55, "does_not_close", "'S' has no outlet for the rest"},
      {"bleed: 5 %", "bleed: rest", 55, "does_not_close", "exactly one outlet takes the rest"},
      {"bleed: 5 %", "bleed: 5 %, other: 96 %", 55, "does_not_close", "sum to 101 %"},
      {"bleed: 5 %", "bleed: 5 kg", 55, "wrong_unit", "'5 kg' is not a share or a volume flow"},
  });
}

TEST(read_flowsheet, refuses_a_bad_history) {
  expect_bad_plant({
      {"until: 168 h, ", "", 58, "missing_key", "'until' is needed"},
      {", every: 15 min", "", 58, "missing_key", "'every' is needed"},
      {"every: 15 min", "every: 15 d", 58, "out_of_range", "'15 d' is longer than the whole history of '168 h'"},
      {"until: 168 h", "until: 168", 58, "wrong_unit", "has no unit; a time is needed"},
      {"{all: same, L.2: {NaCl: 1 g/L}}", "steedy", 58, "unknown_name", "'steedy' is not the name of a liquor"},
      {"all: same", "all: sane", 58, "unknown_name", "did you mean 'same'?"},
      {"start: {all: same, L.2: {NaCl: 1 g/L}}, ", "", 58, "missing_key", "'start' is needed"},
  });
}

TEST(read_beaker, refuses_bad_input) {
  const Bad rows[] = {
      {"kind: beaker", "kind: flowsheet", 2, "unknown_name", "of kind 'flowsheet'; beaker is needed"},
      {"  liquor: {NH3: 4.5 mol/L, NaCl: 10 g/L}", "  liquor: mine", 6, "unknown_name", "'mine' is not the name of a liquor; there is: water"},
      {"volume: 2 L", "volume: 2 kg", 7, "wrong_unit", "is not a volume"},
      {"  temperature: 30 degC\n", "\n", 6, "missing_key", "'temperature' is needed"},
      {"chlorargyrite: 80 g", "chlorargyrite: 80 mL", 9, "wrong_unit", "'80 mL' is not an amount or a mass"},
      {"chlorargyrite: 80 g", "chlorargyrite: 80", 9, "wrong_unit", "'80' has no unit"},
      {"pH: 9.5", "pH: 9.5 %", 10, "bad_quantity", "a plain number is needed"},
      {"CO2: 40 Pa", "CO2: 40 ppm", 11, "wrong_unit", "is not a pressure"},
      {"gas: {CO2: 40 Pa, NH3: 1 kPa}", "gas: open", 11, "wrong_kind", "gas is none, or the partial pressure"},
      {"steps:\n", "show: [pH]\nsteps:\n", 12, "unknown_key", "'show' is not a key here"},
      {"name: taken up", "add: {NaCl: 1 g}", 13, "missing_key", "'name' is needed"},
      {"name: taken up", "name: filtered", 16, "duplicate", "stands already in line 13"},
      {"H2SO4: 96 %, water: rest", "H2SO4: 96 %", 14, "does_not_close", "the shares sum to 96 %"},
      {"add: {H2SO4: 4.1 mol}, ", "", 14, "missing_key", "but nothing is added"},
      {", with: H2SO4", "", 15, "missing_key", "until needs the compound to dose"},
      {"until: {pH: 2.0}, ", "", 15, "missing_key", "with needs what to dose until"},
      {"filter_off: all", "filter_off: some", 16, "unknown_name", "allowed: all"},
      {"heat_to: 60 degC", "heat_to: 60", 17, "wrong_unit", "has no unit; a temperature is needed"},
  };
  for (const Bad& bad : rows) {
    Diagnostics diagnostics;
    EXPECT_TRUE(read_beaker(with(bench, bad.piece, bad.other), "b.yaml", catalogue(), diagnostics));
    expect_fault(diagnostics, bad);
  }
}

TEST(read_flowsheet, lists_all_faults_in_one_pass) {
  std::string text = plant;
  for (const auto& [piece, other] : {std::pair{"activity: ideal", "activity: none"}, {"pH: 7.6", "pH: 76"}, {"moisture: 3 %", "moisture: wet"},
                                     {"constant: 0.8 1/h", "constant: fast"}, {"rate: 50 kg/h", "rate: 50"}, {"tanks: 8", "tanks: 0"},
                                     {"every: 15 min", "every: 15 m"}})
    text = with(text, piece, other);
  Diagnostics diagnostics;
  EXPECT_TRUE(read_flowsheet(text, "p.yaml", catalogue(), diagnostics));
  std::vector<int> lines;
  for (const Diagnostic& fault : diagnostics.sorted_faults()) lines.push_back(fault.place.line);
  EXPECT_EQ(lines, (std::vector<int>{7, 19, 29, 41, 49, 53, 58})) << listed(diagnostics);
}

TEST(read_flowsheet, suggests_a_key_for_a_strange_outlet) {
  Diagnostics diagnostics;
  read_flowsheet(with(plant, "bleed: 5 %", "temprature: 25 degC"), "p.yaml", catalogue(), diagnostics);
  const std::string all = listed(diagnostics);
  EXPECT_NE(all.find("p.yaml:55:60"), std::string::npos) << all;
  EXPECT_NE(all.find("'temprature' is read as the name of an outlet; did you mean 'temperature'?"), std::string::npos) << all;
}

TEST(read_flowsheet, gives_nothing_when_the_text_is_no_yaml) {
  for (const char* text : {"", "a: [", "leat: 1\nleat: 1\n", "just words"}) {
    Diagnostics diagnostics;
    EXPECT_FALSE(read_flowsheet(text, "p.yaml", catalogue(), diagnostics)) << text;
    EXPECT_FALSE(read_beaker(text, "p.yaml", catalogue(), diagnostics)) << text;
    EXPECT_FALSE(diagnostics.ok());
  }
  Diagnostics diagnostics;
  EXPECT_TRUE(read_flowsheet("[a, b]", "p.yaml", catalogue(), diagnostics));
  EXPECT_FALSE(diagnostics.ok());
}

// Any line of a good file left out, or its value of another kind: read to the end, or refused as no YAML.
TEST(read_flowsheet, survives_any_line_changed) {
  for (const std::string& text : {std::string(plant), std::string(bench)}) {
    for (std::size_t at = 0; at < text.size(); at = text.find('\n', at) + 1) {
      const std::size_t end = text.find('\n', at);
      const std::string line = text.substr(at, end - at);
      const std::string key = line.substr(0, line.find(':') + 1);
      for (const std::string& other : {std::string(), key + " 7", key + " [7 %, x]", key + " {a: {b: c}}", key + " {law: {a: b}, unit: [a], phases: 3}"}) {
        Diagnostics diagnostics;
        const std::string changed = text.substr(0, at) + other + text.substr(end);
        const bool read = text == plant ? read_flowsheet(changed, "p.yaml", catalogue(), diagnostics).has_value()
                                        : read_beaker(changed, "b.yaml", catalogue(), diagnostics).has_value();
        EXPECT_TRUE(read || !diagnostics.ok()) << changed;
      }
    }
  }
}

TEST(file_kind, tells_flowsheet_and_beaker) {
  Diagnostics diagnostics;
  EXPECT_EQ(file_kind(plant, "p.yaml", diagnostics), "flowsheet");
  EXPECT_EQ(file_kind(bench, "b.yaml", diagnostics), "beaker");
  EXPECT_TRUE(diagnostics.ok());
}

TEST(file_kind, refuses_what_is_neither) {
  const Bad rows[] = {
      {"", "kind: beaker\n", 1, "missing_key", "'leat' is needed here"},
      {"", "leat: 1\n", 1, "missing_key", "'kind' is needed here"},
      {"", "leat: 1\n\nkind: becker\n", 3, "unknown_name", "did you mean 'beaker'?"},
      {"", "kind: beaker\nleat: 3\n", 2, "out_of_range", "allowed is 1 to 1"},
      {"", "[a]\n", 1, "wrong_kind", "a map of 'key: value' is needed"},
  };
  for (const Bad& bad : rows) {
    Diagnostics diagnostics;
    EXPECT_EQ(file_kind(bad.other, "f.yaml", diagnostics), "");
    expect_fault(diagnostics, bad);
  }
}

}  // namespace
}  // namespace leat
