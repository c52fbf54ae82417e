// Verbs that are not yet there: each definition here gives way to the real one.
#include "tools/leat/verbs.hpp"

namespace leat {
namespace {

int pending(const char* verb, const RunArguments& arguments) {
  Answer answer;
  answer.verb = verb;
  answer.file = arguments.file;
  answer.exit_code = Exit::usage;
  answer.failure = "this verb is not yet there";
  return say(answer, arguments.manner);
}

}  // namespace

__attribute__((weak)) int ladder_verb(const LadderArguments& arguments) { return pending("ladder", arguments); }
__attribute__((weak)) int campaign_verb(const CampaignArguments& arguments) { return pending("campaign", arguments); }
__attribute__((weak)) int report_verb(const ReportArguments& arguments) { return pending("report", arguments); }

}  // namespace leat
