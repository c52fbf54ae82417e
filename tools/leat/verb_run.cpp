#include <fmt/format.h>
#include <unistd.h>

#include "models/register/register_models.hpp"
#include "sim/input/read_flowsheet.hpp"
#include "sim/results/hdf5_file.hpp"
#include "sim/results/run_layout.hpp"
#include "sim/run/run_case.hpp"
#include "tools/leat/print_run.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {

int run_verb(const RunArguments& arguments) {
  std::string text;
  if (!read_text(arguments.file, text)) return Exit::input_faults;
  Diagnostics diagnostics;
  const SpeciesLibrary library = load_library();
  const Catalogue catalogue = register_models();
  const std::string kind = file_kind(text, arguments.file, diagnostics);
  if (kind == "beaker") return speciate_verb(arguments);  // the file says what it is
  const auto flowsheet = read_flowsheet(text, arguments.file, catalogue, diagnostics);
  if (!flowsheet) return tell_faults(diagnostics, arguments.file);
  const auto built = build_circuit(*flowsheet, library, catalogue, diagnostics);
  if (!built || !diagnostics.ok()) return tell_faults(diagnostics, arguments.file);
  tell_cautions(diagnostics);

  RunOptions options;
  const bool terminal = isatty(fileno(stderr)) != 0;
  if (terminal) options.progress = [](double share) { fmt::print(stderr, "\rthrough time {:3.0f} %", 100 * share); };
  const RunResult result = run_case(*flowsheet, *built, options);
  if (terminal && result.timed) fmt::print(stderr, "\n");
  if (!result.steady_ok || (result.timed && !result.time_ok)) {
    fmt::print(stderr, "{}: {}\n", arguments.file, result.failure);
    if (!result.timed || !result.time_ok) return Exit::not_solved;  // a history that closes is still worth having
  }
  const std::string out = arguments.out.empty() ? default_output(arguments.file) : arguments.out;
  const ResultSet set = layout_of(result, *built->library, {base_name(arguments.file), text, flowsheet->title, program_name()});
  const FileOutcome written = write_result_file(set, out);
  if (!written.ok) {
    fmt::print(stderr, "{}\n", written.message);
    return Exit::machine_trouble;
  }
  print_run(result);
  fmt::print("\nWritten to {} (HDF5, also netCDF-4; variables in outputs/README.md)\n", out);
  return result.steady_ok ? Exit::done : Exit::not_solved;
}

}  // namespace leat
