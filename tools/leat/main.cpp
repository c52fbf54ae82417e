#include <CLI/CLI.hpp>
#include <fcntl.h>
#include <unistd.h>

#include <algorithm>
#include <csignal>
#include <functional>
#include <sstream>
#include <system_error>

#include "tools/leat/verbs.hpp"

// The command: reads its words, hands them to a verb, turns what escapes into an exit code.
namespace leat {
namespace {

// What every verb was given, and what it then does.
struct Words {
  RunArguments check, run, speciate, constants;
  LadderArguments ladder;
  CampaignArguments campaign;
  ReportArguments report;
  std::string pattern;
};
struct Verb {
  CLI::App* words = nullptr;
  const RunArguments* arguments = nullptr;
  std::function<int()> act;
};

CLI::App* add_verb(CLI::App& app, const char* name, const char* what, RunArguments& arguments, const char* file) {
  CLI::App* verb = app.add_subcommand(name, what);
  if (file) verb->add_option("file", arguments.file, file)->required();
  CLI::Option* json = verb->add_flag("--json", arguments.manner.json, "answer with one JSON object on stdout");
  verb->add_option("--csv", arguments.manner.csv, "answer with one table as CSV on stdout, by its name, or with all")->type_name("TABLE")->excludes(json);
  return verb;
}

void add_out(CLI::App* verb, RunArguments& arguments, const char* what) { verb->add_option("--out", arguments.out, what)->type_name("PATH"); }

std::vector<Verb> add_case_verbs(CLI::App& app, Words& words) {
  std::vector<Verb> verbs;
  CLI::App* check = add_verb(app, "check", "read and validate a file, say what would be solved, solve nothing", words.check, "flowsheet or beaker");
  verbs.push_back({check, &words.check, [&] { return check_verb(words.check); }});
  CLI::App* run = add_verb(app, "run", "solve a circuit at steady state and, with a history, through time", words.run, "flowsheet (a beaker is solved as by speciate)");
  add_out(run, words.run, "results file; default outputs/NAME.h5");
  verbs.push_back({run, &words.run, [&] { return run_verb(words.run); }});
  CLI::App* speciate = add_verb(app, "speciate", "solve one beaker of liquor, step by step", words.speciate, "beaker");
  add_out(speciate, words.speciate, "results file; default outputs/NAME.h5");
  verbs.push_back({speciate, &words.speciate, [&] { return speciate_verb(words.speciate); }});
  CLI::App* constants = add_verb(app, "constants", "list the library of constants with their sources", words.constants, nullptr);
  constants->add_option("pattern", words.pattern, "part of a name or reaction, e.g. Ag or NH3");
  verbs.push_back({constants, &words.constants, [&] { return constants_verb(words.pattern, words.constants.manner); }});
  return verbs;
}

void add_study_verbs(CLI::App& app, Words& words, std::vector<Verb>& verbs) {
  CLI::App* ladder = add_verb(app, "ladder", "solve a case again and again with one input stepped; several cases side by side", words.ladder, "ladder file, or a case with --vary");
  ladder->add_option("--vary", words.ladder.vary, "\"PATH: FROM to TO in N points\" (or N logarithmic points), of a case")->type_name("TEXT");
  add_out(ladder, words.ladder, "results file; default outputs/NAME.ladder.h5");
  verbs.push_back({ladder, &words.ladder, [&] { return ladder_verb(words.ladder); }});
  CLI::App* campaign = add_verb(app, "campaign", "solve many variants of a case in parallel; what is done stays done", words.campaign, "campaign file");
  campaign->add_option("--shard", words.campaign.shard, "I/N: only the I-th of N parts, for clusters")->type_name("I/N");
  campaign->add_option("--merge", words.campaign.merge, "ledgers of shards, to be put into one")->type_name("LEDGER ...")->excludes("--shard");
  campaign->add_option("--workers", words.campaign.workers, "cases solved at once; default one a core")->check(CLI::Range(1, 1024))->excludes("--merge");
  campaign->add_flag("--retry", words.campaign.retry, "solve crashed and timed-out cases once more")->excludes("--merge");
  add_out(campaign, words.campaign, "ledger; default outputs/NAME.ledger");
  verbs.push_back({campaign, &words.campaign, [&] { return campaign_verb(words.campaign); }});
  CLI::App* report = add_verb(app, "report", "make one HTML page of a results file, or of a campaign's ledger", words.report, "results file or ledger");
  report->add_option("--pages", words.report.pages, "of a ledger: pages of so many leading cases; default 10")->check(CLI::Range(0, 1000000));
  add_out(report, words.report, "page; default beside the file, NAME.html");
  verbs.push_back({report, &words.report, [&] { return report_verb(words.report); }});
}

// Closed standard streams are held, stdout by what cannot be written: no file that is opened later can take their place.
void hold_standard_streams() {
  for (const int stream : {STDIN_FILENO, STDOUT_FILENO, STDERR_FILENO})
    if (fcntl(stream, F_GETFD) == -1) {
      const int held = open("/dev/null", stream == STDIN_FILENO ? O_WRONLY : stream == STDOUT_FILENO ? O_RDONLY : O_RDWR);
      if (held >= 0 && held != stream) dup2(held, stream);
    }
}

// What was typed cannot be read, or asks for help or the version.
int say_usage(const CLI::App& app, const CLI::ParseError& error, int count, char** typed, const std::string& verb) {
  std::ostringstream out, err;
  const bool asked = app.exit(error, out, err) == 0;
  const int code = asked ? Exit::done : Exit::usage;
  const bool json = std::any_of(typed, typed + count, [](const char* word) { return std::string(word) == "--json"; });
  if (!json) {
    tell_text(err.str());
    return put_out(out.str(), code);
  }
  Answer answer;
  answer.verb = verb;
  answer.exit_code = code;
  if (!asked) answer.failure = error.what();
  std::istringstream text(out.str());
  for (std::string line; std::getline(text, line);) answer.lines.push_back(line);
  return say(answer, {true, ""});
}

int say_trouble(const Verb& verb, int code, const std::string& why) {
  Answer answer;
  answer.verb = verb.words->get_name();
  answer.file = verb.arguments->file;
  answer.exit_code = code;
  answer.failure = why;
  return say(answer, verb.arguments->manner);
}

int act(const Verb& verb) {
  try {
    return verb.act();
  } catch (const std::bad_alloc&) {
    return say_trouble(verb, Exit::machine_trouble, "out of memory");
  } catch (const std::system_error& error) {
    return say_trouble(verb, Exit::machine_trouble, std::string("trouble with the machine: ") + error.what());
  } catch (const std::exception& error) {
    return say_trouble(verb, Exit::own_bug, std::string("this is a fault of leat itself: ") + error.what());
  }
}

}  // namespace
}  // namespace leat

int main(int argc, char** argv) {
  using namespace leat;
  hold_standard_streams();
  std::signal(SIGXFSZ, SIG_IGN);  // a file size limit is an error to report, not a death
  std::signal(SIGPIPE, SIG_IGN);  // the same of a reader that has gone away
  CLI::App app{"leat: leach circuits in ammonia, chloride or cyanide, from a YAML flowsheet to metal recovery by complex family"};
  app.set_version_flag("--version", program_name());
  app.require_subcommand(1);
  Words words;
  std::vector<Verb> verbs = add_case_verbs(app, words);
  add_study_verbs(app, words, verbs);
  const auto chosen = [&] { return std::find_if(verbs.begin(), verbs.end(), [](const Verb& one) { return one.words->parsed(); }); };
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    return say_usage(app, error, argc, argv, chosen() == verbs.end() ? "" : chosen()->words->get_name());
  }
  return chosen() == verbs.end() ? Exit::usage : act(*chosen());
}
