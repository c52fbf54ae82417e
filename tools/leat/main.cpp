#include <CLI/CLI.hpp>
#include <fmt/format.h>

#include <csignal>
#include <system_error>

#include "tools/leat/verbs.hpp"

// The command: reads its words, hands them to a verb, turns what escapes into an exit code.
int main(int argc, char** argv) {
  using namespace leat;
  std::signal(SIGXFSZ, SIG_IGN);  // a file size limit is an error to report, not a death
  CLI::App app{"leat: leach circuits in ammonia, chloride or cyanide, from a YAML flowsheet to metal recovery by complex family"};
  app.set_version_flag("--version", program_name());
  app.require_subcommand(1);
  RunArguments arguments;
  std::string pattern;
  CLI::App* check = app.add_subcommand("check", "read and validate a file, say what would be solved, solve nothing");
  check->add_option("file", arguments.file, "flowsheet or beaker")->required();
  CLI::App* run = app.add_subcommand("run", "solve a circuit at steady state and, with a history, through time");
  run->add_option("file", arguments.file, "flowsheet (a beaker is solved as by speciate)")->required();
  run->add_option("--out", arguments.out, "results file; default outputs/NAME.h5");
  CLI::App* speciate = app.add_subcommand("speciate", "solve one beaker of liquor, step by step");
  speciate->add_option("file", arguments.file, "beaker")->required();
  speciate->add_option("--out", arguments.out, "results file; default outputs/NAME.h5");
  CLI::App* constants = app.add_subcommand("constants", "list the library of constants with their sources");
  constants->add_option("pattern", pattern, "part of a name or reaction, e.g. Ag or NH3");
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    return app.exit(error) == 0 ? Exit::done : Exit::usage;
  }
  try {
    if (*check) return check_verb(arguments.file);
    if (*run) return run_verb(arguments);
    if (*speciate) return speciate_verb(arguments);
    if (*constants) return constants_verb(pattern);
  } catch (const std::bad_alloc&) {
    fmt::print(stderr, "out of memory\n");
    return Exit::machine_trouble;
  } catch (const std::system_error& error) {
    fmt::print(stderr, "trouble with the machine: {}\n", error.what());
    return Exit::machine_trouble;
  } catch (const std::exception& error) {
    fmt::print(stderr, "this is a fault of leat itself: {}\n", error.what());
    return Exit::own_bug;
  }
  return Exit::usage;
}
