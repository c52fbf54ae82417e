// say: turns an answer into what stands on stdout and stderr, and into the exit code.
//   text:  lines and tables for people, cautions, what was written; long tables thinned
//   json:  one object (sim/results/answer.hpp), in every case
//   csv:   one table, or all of them, each behind a line `# NAME: heading`; cautions go to stderr
// Faults of the input and failures stand on stderr in all three manners.
#pragma once
#include <fmt/format.h>

#include <string>
#include <utility>
#include <vector>

#include "models/core/diagnostics.hpp"
#include "sim/results/answer.hpp"

namespace leat {

// How an answer is said: text for people, one JSON object, or tables as CSV.
struct Manner {
  bool json = false;
  std::string csv;      // name of one table, or `all`; empty: no CSV
};

// Says an answer on stdout, faults and failures on stderr too, and gives its exit code; machine_trouble where stdout cannot
// be written. A reader that has gone away (leat ... | head) is no trouble.
int say(const Answer& answer, const Manner& manner);

// A message for people on stderr; trouble with it is no trouble (fmt::print would throw).
void tell_text(const std::string& text);
template <class... Values>
void tell(fmt::format_string<Values...> text, Values&&... values) {
  tell_text(fmt::format(text, std::forward<Values>(values)...));
}

// Writes to stdout as it is: the given exit code, or machine_trouble.
int put_out(const std::string& text, int exit_code);

// The text of an answer for people, without what goes to stderr.
std::string answer_text(const Answer& answer);

// Before anything is solved: whether --csv names one of a verb's tables. If not, the answer says so and ends with usage.
bool knows_csv(const Manner& manner, const std::vector<std::string>& names, Answer& answer);

// Faults and cautions of a file, into an answer; its exit code becomes input_faults if there is a fault. True if there is none.
bool take_findings(const Diagnostics& diagnostics, Answer& answer);

// A share between 0 and 1 shown on stderr while it grows, if stderr is a terminal: "through time  42 %".
class Progress {
 public:
  explicit Progress(std::string what);
  ~Progress();
  Progress(const Progress&) = delete;
  Progress& operator=(const Progress&) = delete;
  void show(double share);
  void say(const std::string& text);  // the same with words of its own

 private:
  std::string what_;
  bool terminal_ = false, shown_ = false;
};

}  // namespace leat
