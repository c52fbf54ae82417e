#pragma once
#include <string>

#include "models/chemistry/species_library.hpp"
#include "models/core/diagnostics.hpp"

namespace leat {

// Exit codes of the command.
enum Exit { done = 0, usage = 1, input_faults = 2, not_solved = 3, machine_trouble = 4, own_bug = 5 };

struct RunArguments {
  std::string file, out;       // out empty: outputs/NAME.h5 under the working folder
};

int check_verb(const std::string& file);
int run_verb(const RunArguments& arguments);
int speciate_verb(const RunArguments& arguments);
int constants_verb(const std::string& pattern);

// Shared by the verbs.
SpeciesLibrary load_library();                                   // throws std::logic_error if the embedded data is at fault
bool read_text(const std::string& file, std::string& text);      // false, with a message on stderr, if it cannot be read
int tell_faults(const Diagnostics& diagnostics, const std::string& file);  // prints all; returns Exit::input_faults
void tell_cautions(const Diagnostics& diagnostics);
std::string default_output(const std::string& file);             // outputs/NAME.h5
std::string base_name(const std::string& file);
std::string program_name();                                      // leat 0.1.0

}  // namespace leat
