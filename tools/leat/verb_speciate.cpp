#include <fmt/format.h>

#include <algorithm>
#include <cmath>

#include "models/core/constants.hpp"
#include "models/register/register_models.hpp"
#include "sim/input/read_beaker.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "sim/results/hdf5_file.hpp"
#include "sim/results/run_layout.hpp"
#include "sim/results/table_text.hpp"
#include "sim/run/speciate.hpp"
#include "tools/leat/print_run.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

void print_steps(const BeakerResult& result) {
  TextTableWriter table({{"step", ""}, {"T", "degC"}, {"volume", "L"}, {"density", "kg/m3"}, {"pH", ""}, {"I", "mol/kg"}, {"solids", ""}, {"dosed", ""}});
  for (const BeakerStep& step : result.steps) {
    std::string solids;
    for (std::size_t s = 0; s < result.chemistry->phases.size(); ++s)
      if (step.state.phase_amount[s] > 0)
        solids += fmt::format("{}{} {} g", solids.empty() ? "" : ", ", result.chemistry->phases[s].name,
                              significant(1000 * step.state.phase_amount[s] * result.chemistry->phases[s].molar_mass));
    std::string dosed = step.added.empty() ? "-" : fmt::format("{} mol {}", significant(step.added.front()), step.dosed);
    if (step.proton_added != 0) dosed = fmt::format("{} mol H^+", significant(step.proton_added));
    table.add_row({step.name, step.temperature - zero_celsius, 1000 * step.liquor_volume, step.liquor_density, step.state.ph,
                   step.state.ionic_strength, solids.empty() ? "-" : solids, dosed});
  }
  fmt::print("{}", table.to_string());
}

// Who holds each component: share of its dissolved total in each species, the larger ones.
void print_holders(const BeakerResult& result) {
  const Chemistry& c = *result.chemistry;
  std::vector<TableColumn> columns = {{"total", ""}, {"held by", ""}};
  for (const BeakerStep& step : result.steps) columns.push_back({step.name, "% of dissolved"});
  TextTableWriter table(columns);
  for (int j = 0; j < c.component_count(); ++j) {
    if (j == c.hydrogen) continue;
    std::vector<TextTableWriter::Cell> totals = {c.total_names[j], "dissolved [mol/L]"};
    for (const BeakerStep& step : result.steps) totals.push_back(std::max(0.0, step.dissolved[j]) / step.liquor_volume / 1000);
    table.add_row(totals);
    for (std::size_t i = 0; i < c.species.size(); ++i) {
      double count = 0;
      for (const Share& share : c.species[i].shares)
        if (share.component == j) count = share.coefficient;
      if (count <= 0) continue;
      std::vector<TextTableWriter::Cell> row = {"", c.species[i].name};
      double most = 0;
      for (const BeakerStep& step : result.steps) {
        const bool present = step.dissolved[j] > 1e-12 * step.dissolved.back();
        const double share = present ? 100 * count * step.state.molality[i] * step.state.solvent / step.dissolved[j] : std::nan("");
        row.push_back(share);
        if (present) most = std::max(most, share);
      }
      if (most >= 0.1) table.add_row(row);
    }
  }
  fmt::print("\nWho holds what (species with at least 0.1 % somewhere)\n{}", table.to_string());
}

void print_saturation(const BeakerResult& result) {
  const Chemistry& c = *result.chemistry;
  if (c.phases.empty()) return;
  std::vector<TableColumn> columns = {{"solid", ""}, {"may form", ""}};
  for (const BeakerStep& step : result.steps) columns.push_back({step.name, "log10"});
  TextTableWriter table(columns, 3);
  for (std::size_t s = 0; s < c.phases.size(); ++s) {
    std::vector<TextTableWriter::Cell> row = {c.phases[s].name, c.phases[s].may_form ? "yes" : "watched"};
    for (const BeakerStep& step : result.steps) row.push_back(std::abs(step.state.log10_omega[s]) < 1e-9 ? 0.0 : step.state.log10_omega[s]);
    table.add_row(row);
  }
  fmt::print("\nSaturation index\n{}", table.to_string());
}

}  // namespace

int speciate_verb(const RunArguments& arguments) {
  std::string text;
  if (!read_text(arguments.file, text)) return Exit::input_faults;
  Diagnostics diagnostics;
  const SpeciesLibrary library = load_library();
  const Catalogue catalogue = register_models();
  const std::string kind = file_kind(text, arguments.file, diagnostics);
  if (kind == "flowsheet") {
    fmt::print(stderr, "{}: is a flowsheet; use leat run\n", arguments.file);
    return Exit::input_faults;
  }
  const auto beaker = read_beaker(text, arguments.file, catalogue, diagnostics);
  if (!beaker || !diagnostics.ok()) return tell_faults(diagnostics, arguments.file);
  const auto result = speciate(*beaker, library, catalogue, diagnostics);
  if (!result || !diagnostics.ok()) return tell_faults(diagnostics, arguments.file);
  tell_cautions(diagnostics);
  if (!result->failure.empty()) {
    fmt::print(stderr, "{}: {}\n", arguments.file, result->failure);
    return Exit::not_solved;
  }
  for (const BeakerStep& step : result->steps)
    if (!(step.closure.balance <= 1e-9) || !(step.closure.mass_action <= 1e-8)) {
      fmt::print(stderr, "{}: step '{}' does not close: balance {:.2g}, mass action {:.2g}\n", arguments.file, step.name, step.closure.balance,
                 step.closure.mass_action);
      return Exit::not_solved;
    }
  const std::string out = arguments.out.empty() ? default_output(arguments.file) : arguments.out;
  const FileOutcome written = write_result_file(layout_of(*result, library, {base_name(arguments.file), text, beaker->title, program_name()}), out);
  if (!written.ok) {
    fmt::print(stderr, "{}\n", written.message);
    return Exit::machine_trouble;
  }
  if (!beaker->title.empty()) fmt::print("{}\n\n", beaker->title);
  print_steps(*result);
  print_holders(*result);
  print_saturation(*result);
  double balance = 0, action = 0;
  for (const BeakerStep& step : result->steps) balance = std::max(balance, step.closure.balance), action = std::max(action, step.closure.mass_action);
  fmt::print("\nClosure: balance {:.1e}, mass action {:.1e} (ln), worst step\n", balance, action);
  print_cautions(result->cautions);
  fmt::print("\nWritten to {} (HDF5, also netCDF-4; variables in outputs/README.md)\n", out);
  return Exit::done;
}

}  // namespace leat
