#include <filesystem>
#include <fstream>
#include <span>
#include <sstream>
#include <stdexcept>

#include "sim/results/campaign_tables.hpp"
#include "sim/results/hdf5_file.hpp"
#include "sim/results/page.hpp"
#include "sim/results/result_access.hpp"
#include "sim/results/run_layout.hpp"
#include "sim/study/campaign.hpp"
#include "sim/study/ledger.hpp"
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

enum class FileKind { results, ledger, other };

// By the first bytes, as HDF5 and SQLite say of themselves.
FileKind kind_of(const std::string& path) {
  std::ifstream in(path, std::ios::binary);
  std::string head(16, '\0');
  in.read(head.data(), static_cast<std::streamsize>(head.size()));
  if (head.compare(0, 8, "\x89HDF\r\n\x1a\n") == 0) return FileKind::results;
  return head.compare(0, 15, "SQLite format 3") == 0 ? FileKind::ledger : FileKind::other;
}

int refused(Answer& answer, const Manner& manner, int exit_code, std::string why) {
  if (const std::string path = answer.file + ": "; why.starts_with(path)) why.erase(0, path.size());  // say puts it before
  answer.exit_code = exit_code;
  answer.failure = std::move(why);
  return say(answer, manner);
}

// Why there is no page of these results; empty if there is one.
std::string unfit(const ResultSet& results) {
  const std::string kind = attribute(results, "leat_kind"), version = attribute(results, "leat_format_version");
  if (kind.empty()) return "is an HDF5 file, but not a results file of leat";
  if (kind != "run" && kind != "beaker" && kind != "ladder") return "holds results of the kind '" + kind + "', which this leat does not know";
  if (version != format_version)
    return "is of version " + version + " of the results format, this leat reads version " + format_version + "; run " +
           attribute(results, "leat_input_file") + " again";
  return {};
}

// A results file as a page. What is in the file was written by leat once, but anybody may have changed it since: what cannot be shown
// is a fault of the file.
struct MadePage {
  std::string html, fault;
  std::vector<ResultTable> tables;
  std::string title, cautions;
};

MadePage page_of_file(const std::string& path) {
  MadePage made;
  const auto results = read_result_file(path, made.fault);
  if (!results) return made;
  made.fault = unfit(*results);
  if (!made.fault.empty()) return made;
  try {
    check_result_set(*results);
    made.tables = tables_of(*results);
    made.html = page_of(*results);
  } catch (const std::logic_error& error) {
    made.fault = std::string("does not hold what a results file of leat holds: ") + error.what();
    return made;
  }
  made.title = attribute(*results, "title");
  if (const TextTable* cautions = find_texts(*results, "cautions_in_short"); cautions && !cautions->values.empty())
    made.cautions = cautions->values.front();
  return made;
}

bool write_page(const std::string& html, const std::string& what, const std::string& path, Answer& answer) {
  return written(write_whole_file(path, std::as_bytes(std::span(html))), what, path, answer);
}

int report_results(const ReportArguments& arguments, const std::string& out, Answer& answer) {
  const MadePage made = page_of_file(arguments.file);
  if (!made.fault.empty()) return refused(answer, arguments.manner, Exit::input_faults, made.fault);
  std::vector<std::string> names;
  for (const ResultTable& table : made.tables) names.push_back(table.name);
  if (!knows_csv(arguments.manner, names, answer)) return say(answer, arguments.manner);
  if (!write_page(made.html, "page", out, answer)) return say(answer, arguments.manner);
  answer.title = made.title;
  answer.lines.push_back("One HTML page, complete in itself: a browser opens it, no network is needed.");
  if (arguments.manner.json || !arguments.manner.csv.empty()) answer.tables = made.tables;
  std::istringstream lines(made.cautions);
  for (std::string line; std::getline(lines, line);) answer.cautions.push_back(line);
  return say(answer, arguments.manner);
}

// Pages of the leading cases that kept their results, beside the campaign's page in NAME.cases.
bool write_case_pages(CampaignResult& campaign, const ReportArguments& arguments, const std::filesystem::path& out, Answer& answer) {
  const std::filesystem::path ledger_folder = std::filesystem::path(arguments.file).parent_path();
  const std::filesystem::path folder = cases_folder(out.parent_path() / out.stem());
  int pages = 0;
  for (const std::size_t k : ranked_cases(campaign)) {
    if (pages == arguments.pages) break;
    CampaignCase& one = campaign.cases[k];
    if (one.results_file.empty()) continue;
    const MadePage made = page_of_file((ledger_folder / one.results_file).string());
    if (!made.fault.empty()) {
      answer.cautions.push_back("no page of case " + std::to_string(one.number) + ": " + made.fault);
      continue;
    }
    const std::filesystem::path page = folder / std::filesystem::path(results_file_name(one.number)).replace_extension(".html");
    if (!write_page(made.html, "page of case " + std::to_string(one.number), page.string(), answer)) return false;
    one.page = (folder.filename() / page.filename()).string();
    ++pages;
  }
  return true;
}

int report_ledger(const ReportArguments& arguments, const std::string& out, Answer& answer) {
  std::string fault;
  auto campaign = read_ledger(arguments.file, fault);
  if (!campaign) return refused(answer, arguments.manner, Exit::input_faults, fault);
  if (!knows_csv(arguments.manner, table_names("campaign"), answer)) return say(answer, arguments.manner);
  answer.title = campaign->title;
  if (arguments.manner.json || !arguments.manner.csv.empty()) answer.tables = tables_of(*campaign);
  answer.cautions = campaign->cautions;
  if (write_case_pages(*campaign, arguments, out, answer) && write_page(page_of(*campaign), "page", out, answer)) {
    answer.lines.push_back("One HTML page, complete in itself: a browser opens it, no network is needed.");
    if (answer.written.size() > 1)
      answer.lines.push_back(std::to_string(answer.written.size() - 1) + " leading cases have pages of their own, linked from it.");
  }
  return say(answer, arguments.manner);
}

}  // namespace

int report_verb(const ReportArguments& arguments) {
  Answer answer;
  answer.verb = "report";
  answer.file = arguments.file;
  std::error_code error;
  if (std::filesystem::is_directory(arguments.file, error)) return refused(answer, arguments.manner, Exit::input_faults, "is a folder, not a file");
  if (!std::ifstream(arguments.file)) return refused(answer, arguments.manner, Exit::input_faults, "cannot be read");
  const FileKind kind = kind_of(arguments.file);
  if (kind == FileKind::other)
    return refused(answer, arguments.manner, Exit::input_faults,
                   "is neither a results file nor a ledger of leat; leat run, speciate, ladder and campaign write them");
  if (!page_available())
    return refused(answer, arguments.manner, Exit::machine_trouble,
                   "this leat was built without pages: npm was missing or could not fetch what they are made of");
  const std::string out = arguments.out.empty() ? page_beside(arguments.file) : arguments.out;
  if (std::filesystem::exists(out, error) && std::filesystem::equivalent(out, arguments.file, error))
    return refused(answer, arguments.manner, Exit::usage, "--out is the file itself; the page needs a name of its own");
  return kind == FileKind::ledger ? report_ledger(arguments, out, answer) : report_results(arguments, out, answer);
}

}  // namespace leat
