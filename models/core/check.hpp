// check: states what must hold if the program itself is right. A failure is a programmer's fault, never a user's:
// a user's mistake is a Diagnostic.
#pragma once

#include <source_location>
#include <stdexcept>
#include <string>
#include <string_view>

namespace leat {

// Throws std::logic_error with file, line, function and message when the condition is false.
inline void check(bool condition, std::string_view message,
                  std::source_location where = std::source_location::current()) {
  if (condition) return;
  throw std::logic_error(std::string(where.file_name()) + ":" + std::to_string(where.line()) + " in " +
                         where.function_name() + ": " + std::string(message));
}

}  // namespace leat
