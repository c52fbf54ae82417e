#include "sim/results/ladder_layout.hpp"

#include <fmt/format.h>

#include <algorithm>
#include <cmath>
#include <filesystem>
#include <map>
#include <memory>
#include <set>
#include <unordered_map>

#include "models/core/check.hpp"
#include "models/core/quantity.hpp"
#include "sim/results/ladder_constants.hpp"
#include "sim/results/ladder_liquor.hpp"
#include "sim/results/layout_parts.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/stepped_input.hpp"

namespace leat {
namespace {

// Ions that come with salts, lime and water: dissolved, but nobody asks which species holds them.
bool is_background(const std::string& component) { return component == "Na" || component == "K" || component == "Ca" || component == "Mg"; }

// One rung of one series, in the long form.
struct Row {
  const LadderSeries* series;
  std::size_t value;        // which of the series
  const LadderRung* rung;
};

// Labels of all rungs, each once, in the order in which they were met.
class LabelUnion {
 public:
  void add(const std::vector<std::string>& labels) {
    for (const std::string& label : labels)
      if (places_.emplace(label, labels_.size()).second) labels_.push_back(label);
  }
  std::size_t at(const std::string& label) const { return places_.at(label); }
  std::size_t size() const { return labels_.size(); }
  const std::vector<std::string>& labels() const { return labels_; }

 private:
  std::vector<std::string> labels_;
  std::unordered_map<std::string, std::size_t> places_;
};

std::vector<std::string> labels_of(const ResultSet& results, const char* axis) {
  const Axis* found = find_axis(results, axis);
  return found ? found->labels : std::vector<std::string>{};
}

// Streams that carry a reagent.
std::vector<std::string> reagents_of(const ResultSet& results) {
  std::vector<std::string> names;
  const Variable* use = find_variable(results, "reagent_consumption");
  for (std::size_t k = 0; use && k < use->values.size(); ++k)
    if (!std::isnan(use->values[k])) names.push_back(labels_of(results, "stream")[k]);
  return names;
}

class LadderFile {
 public:
  LadderFile(const LadderSpec& ladder, const std::vector<std::vector<LadderRung>>& rungs) : ladder_(ladder) {
    check(rungs.size() == ladder.series.size(), "a ladder's rungs belong to its series");
    for (std::size_t s = 0; s < rungs.size(); ++s) {
      check(rungs[s].size() <= ladder.series[s].vary.values.size(), "a ladder has more rungs than values");
      for (std::size_t k = 0; k < rungs[s].size(); ++k) rows_.push_back({&ladder.series[s], k, &rungs[s][k]});
    }
  }

  ResultSet build(const std::string& program, const std::string& failure) {
    add_source(set_, {std::filesystem::path(ladder_.file).filename().string(), ladder_.text, ladder_.title, program}, "ladder");
    add_attributes();
    add_axes();
    add_rungs();
    add_properties();
    make_variables();
    for (std::size_t r = 0; r < rows_.size(); ++r)
      if (rows_[r].rung->results) fill(r, *rows_[r].rung->results);
    for (auto& [name, variable] : made_) set_.variables.push_back(std::move(*variable));
    std::vector<ConstantsOf> cases;
    for (std::size_t r = 0; r < rows_.size(); ++r)
      if (rows_[r].rung->results) cases.push_back({&*rows_[r].rung->results, rows_[r].series->name, r + 1});
    add_constants(set_, cases);
    add_cautions(set_, all_cautions());
    set_.texts.push_back({"failure", "why the ladder ends early; empty if it does not", "", {failure}});
    check_result_set(set_);
    return std::move(set_);
  }

 private:
  void add_attributes() {
    bool runs = false, beakers = false;
    for (const LadderSeries& one : ladder_.series) {
      const bool beaker = kind_of(one) == "beaker";
      (beaker ? beakers : runs) = true;
    }
    const SteppedInput stepped(ladder_);
    set_.attributes.emplace_back("leat_ladder_of", runs && beakers ? "mixed" : beakers ? "beaker" : "run");
    set_.attributes.emplace_back("leat_stepped_path", ladder_.series.front().vary.path);
    set_.attributes.emplace_back("leat_stepped_units", stepped.as_typed());
    set_.attributes.emplace_back("leat_scale", stepped.logarithmic() ? "logarithmic" : "linear");
  }

  // Of a solved rung, else of what the rungs say; a series without any counts as what its neighbours are.
  std::string kind_of(const LadderSeries& series) const {
    for (const Row& row : rows_)
      if (row.series == &series && row.rung->results) return attribute(*row.rung->results, "leat_kind");
    for (const Row& row : rows_)
      if (row.rung->results) return attribute(*row.rung->results, "leat_kind");
    return "run";
  }

  void add_axes() {
    Axis rung{"rung", "rung of the ladder, from 1, series after series", "1", {}, {}, false};
    for (std::size_t r = 0; r < rows_.size(); ++r) rung.values.push_back(static_cast<double>(r + 1));
    for (const Row& row : rows_) {
      if (!row.rung->results) continue;
      for (const char* axis : {"species", "component", "mineral", "family", "element"}) unions_[axis].add(labels_of(*row.rung->results, axis));
      unions_["stream"].add(reagents_of(*row.rung->results));
    }
    Axis names{"series_name", "series of the ladder", "", {}, {}, false};
    for (const LadderSeries& one : ladder_.series) names.labels.push_back(one.name);
    set_.axes = {rung, names};
    static const std::vector<std::pair<const char*, const char*>> meanings = {
        {"species", "dissolved species"}, {"component", "component: all forms of it together, water last"}, {"mineral", "solid that may form, or whose saturation is watched"},
        {"family", "family of complexes"}, {"element", "metal fed with the solids"}, {"stream", "stream that carries a reagent"}};
    for (const auto& [axis, meaning] : meanings) set_.axes.push_back({axis, meaning, "", unions_[axis].labels(), {}, false});
  }

  void add_rungs() {
    const SteppedInput stepped(ladder_);
    Variable numbers{"stepped", stepped.meaning(), stepped.udunits(), {"rung"}, {}};
    TextTable series{"series", "series a rung belongs to", "rung", {}}, status{"status", "solved, not_solved or input_fault", "rung", {}},
        reason{"reason", "why a rung is not solved", "rung", {}}, typed{"value_as_typed", "stepped value as it stands in the case", "rung", {}};
    for (const Row& row : rows_) {
      numbers.values.push_back(stepped.number(row.series->vary, row.value));
      series.values.push_back(row.series->name);
      status.values.push_back(row.rung->status);
      reason.values.push_back(row.rung->reason);
      typed.values.push_back(row.series->vary.values[row.value]);
    }
    set_.variables.push_back(std::move(numbers));
    set_.texts.insert(set_.texts.end(), {series, status, reason, typed});
    TextTable base{"ladder_base_text", "whole text of the case of a series", "series_name", {}}, path{"stepped_path", "stepped input of a series", "series_name", {}};
    for (const LadderSeries& one : ladder_.series) {
      base.values.push_back(one.base.text);
      path.values.push_back(one.vary.path);
    }
    set_.texts.insert(set_.texts.end(), {base, path});
  }

  // What belongs to a species or component whatever the case: taken from the first rung that has it.
  void add_properties() {
    TextTable family{"species_family", "family of each species", "species", std::vector<std::string>(unions_["species"].size())};
    TextTable role{"component_role", "part a component plays: water, proton, metal, ligand or gas", "component", std::vector<std::string>(unions_["component"].size())};
    Variable mass{"component_mass", "molar mass", "kg mol-1", {"component"}, std::vector<double>(unions_["component"].size(), std::nan(""))};
    for (auto row = rows_.rbegin(); row != rows_.rend(); ++row) {
      if (!row->rung->results) continue;
      const ResultSet& one = *row->rung->results;
      const auto species = labels_of(one, "species"), components = labels_of(one, "component");
      for (std::size_t i = 0; i < species.size(); ++i) family.values[unions_["species"].at(species[i])] = find_texts(one, "species_family")->values[i];
      for (std::size_t j = 0; j < components.size(); ++j) {
        role.values[unions_["component"].at(components[j])] = find_texts(one, "component_role")->values[j];
        mass.values[unions_["component"].at(components[j])] = find_variable(one, "component_mass")->values[j];
      }
    }
    set_.texts.insert(set_.texts.end(), {family, role});
    set_.variables.push_back(std::move(mass));
  }

  void make(const char* name, const char* meaning, const char* units, std::vector<std::string> axes) {
    std::size_t size = rows_.size();
    for (const std::string& axis : axes) size *= unions_.at(axis).size();
    axes.insert(axes.begin(), "rung");
    made_.emplace_back(name, std::make_unique<Variable>(Variable{name, meaning, units, std::move(axes), std::vector<double>(size, std::nan(""))}));
  }
  void make_variables() {
    make("ph", "-log10 of the activity of H+", "1", {});
    make("ionic_strength", "ionic strength", "mol kg-1", {});
    make("temperature", "temperature", "K", {});
    make("dissolved", "component dissolved", "mol m-3", {"component"});
    make("share", "share of a dissolved metal held by a species", "1", {"component", "species"});
    make("family_share", "share of a dissolved metal held by a family of complexes", "1", {"component", "family"});
    make("formed", "solid beside the liquor, per volume of liquor", "mol m-3", {"mineral"});
    make("saturation_index", "log10 of ion product over constant", "1", {"mineral"});
    make("recovery", "metal in the pregnant liquor over metal fed", "1", {"element"});
    make("extraction", "1 - metal leaving undissolved over metal fed", "1", {"element"});
    make("formed_leaving", "metal leaving as solids formed in the circuit over metal fed", "1", {"element"});
    make("recovery_by_family", "recovery by family of complexes", "1", {"element", "family"});
    make("reagent_consumption", "reagent fed per mass of dry solids fed", "kg kg-1", {"stream"});
    make("closure", "worst closure of the case", "1", {});
  }

  // The values of one rung of a variable, to be written.
  double* row(const std::string& name, std::size_t r) {
    const auto found = std::find_if(made_.begin(), made_.end(), [&](const auto& one) { return one.first == name; });
    std::vector<double>& values = found->second->values;
    return values.data() + r * (values.size() / rows_.size());
  }
  void put(const std::string& name, std::size_t r, const char* axis, const std::vector<std::string>& labels, const std::vector<double>& values) {
    double* to = row(name, r);
    for (std::size_t k = 0; k < labels.size(); ++k) to[unions_[axis].at(labels[k])] = values[k];
  }

  void fill(std::size_t r, const ResultSet& results) {
    const bool beaker = attribute(results, "leat_kind") == "beaker";
    const LadderLiquor liquor = liquor_of(results, beaker ? ladder_.step : "");
    *row("ph", r) = liquor.ph;
    *row("ionic_strength", r) = liquor.ionic_strength;
    *row("temperature", r) = liquor.temperature;
    *row("closure", r) = liquor.closure;
    put("dissolved", r, "component", labels_of(results, "component"), liquor.dissolved);
    put("formed", r, "mineral", labels_of(results, "mineral"), liquor.formed);
    put("saturation_index", r, "mineral", labels_of(results, "mineral"), liquor.saturation_index);
    fill_shares(r, results, liquor);
    if (beaker) return;
    const auto elements = labels_of(results, "element"), families = labels_of(results, "family");
    for (const char* name : {"recovery", "extraction", "formed_leaving"}) put(name, r, "element", elements, find_variable(results, std::string("steady_") + name)->values);
    const std::vector<double>& parts = find_variable(results, "steady_recovery_by_family")->values;
    double* to = row("recovery_by_family", r);
    for (std::size_t e = 0; e < elements.size(); ++e)
      for (std::size_t f = 0; f < families.size(); ++f)
        to[unions_["element"].at(elements[e]) * unions_["family"].size() + unions_["family"].at(families[f])] = parts[e * families.size() + f];
    const auto streams = labels_of(results, "stream");
    const std::vector<double>& use = find_variable(results, "reagent_consumption")->values;
    for (std::size_t k = 0; k < streams.size(); ++k)
      if (!std::isnan(use[k])) row("reagent_consumption", r)[unions_["stream"].at(streams[k])] = use[k];
  }

  // A metal's dissolved total is the sum over the species that hold it.
  void fill_shares(std::size_t r, const ResultSet& results, const LadderLiquor& liquor) {
    const auto species = labels_of(results, "species"), components = labels_of(results, "component");
    const std::vector<double>& content = find_variable(results, "species_content")->values;
    const std::vector<std::string>& families = find_texts(results, "species_family")->values;
    const std::vector<std::string> known = labels_of(results, "family");
    for (std::size_t j = 0; j < components.size(); ++j) {
      if (find_texts(results, "component_role")->values[j] != "metal" || is_background(components[j])) continue;
      const auto held = [&](std::size_t i) { return content[i * components.size() + j] * liquor.molality[i]; };
      double sum = 0;  // [mol/kg]
      for (std::size_t i = 0; i < species.size(); ++i) sum += held(i);
      if (!(sum > 0)) continue;
      double* share = row("share", r) + unions_["component"].at(components[j]) * unions_["species"].size();
      double* of_family = row("family_share", r) + unions_["component"].at(components[j]) * unions_["family"].size();
      for (const std::string& family : known) of_family[unions_["family"].at(family)] = 0;
      for (std::size_t i = 0; i < species.size(); ++i) {
        share[unions_["species"].at(species[i])] = held(i) / sum;
        if (std::find(known.begin(), known.end(), families[i]) != known.end()) of_family[unions_["family"].at(families[i])] += held(i) / sum;
      }
    }
  }

  // Each text once; one that belongs to a single rung says to which.
  std::vector<Caution> all_cautions() const {
    std::vector<Caution> all;
    std::vector<std::pair<std::size_t, std::size_t>> from;  // rung from 1, how many rungs
    std::map<std::pair<std::string, std::string>, std::size_t> seen;
    for (std::size_t r = 0; r < rows_.size(); ++r)
      for (const Caution& one : rows_[r].rung->cautions) {
        const auto [place, fresh] = seen.emplace(std::pair(one.kind, one.text), all.size());
        if (fresh) all.push_back(one), from.emplace_back(r + 1, 1);
        else if (from[place->second].first != r + 1) ++from[place->second].second;
      }
    for (std::size_t k = 0; k < all.size(); ++k)
      if (from[k].second == 1 && rows_.size() > 1) all[k].text += fmt::format(" (rung {})", from[k].first);
    return all;
  }

  const LadderSpec& ladder_;
  std::vector<Row> rows_;
  std::map<std::string, LabelUnion> unions_;
  std::vector<std::pair<std::string, std::unique_ptr<Variable>>> made_;
  ResultSet set_;
};

}  // namespace

ResultSet layout_of(const LadderSpec& ladder, const std::vector<std::vector<LadderRung>>& rungs, const std::string& program, const std::string& failure) {
  return LadderFile(ladder, rungs).build(program, failure);
}

}  // namespace leat
