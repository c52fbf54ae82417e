#include "sim/study/campaign_cases.hpp"

#include <fmt/format.h>

#include <cctype>
#include <charconv>

#include "models/core/check.hpp"
#include "sim/study/digest.hpp"

namespace leat {

std::string Shard::text() const { return whole() ? "" : fmt::format("{}/{}", index, of); }

std::optional<Shard> read_shard(std::string_view text) {
  Shard shard;
  const char* const end = text.data() + text.size();
  const auto first = std::from_chars(text.data(), end, shard.index);
  if (first.ec != std::errc() || first.ptr == end || *first.ptr != '/') return std::nullopt;
  const auto second = std::from_chars(first.ptr + 1, end, shard.of);
  if (second.ec != std::errc() || second.ptr != end || shard.of < 1 || shard.index < 1 || shard.index > shard.of) return std::nullopt;
  return shard;
}

long long case_count(const CampaignSpec& spec) {
  long long count = spec.listed.empty() ? 1 : static_cast<long long>(spec.listed.size());
  for (const VariedInput& vary : spec.grid) {
    count *= static_cast<long long>(vary.values.size());
    if (count > most_cases) return most_cases + 1;
  }
  return count > most_cases ? most_cases + 1 : count;
}

std::vector<std::string> varied_paths(const CampaignSpec& spec) {
  std::vector<std::string> paths;
  if (!spec.listed.empty())
    for (const auto& [path, value] : spec.listed.front()) paths.push_back(path);
  for (const VariedInput& vary : spec.grid) paths.push_back(vary.path);
  return paths;
}

std::vector<std::string> varied_units(const CampaignSpec& spec) {
  std::vector<std::string> units(spec.listed.empty() ? 0 : spec.listed.front().size());
  for (const VariedInput& vary : spec.grid) units.push_back(vary.unit);
  return units;
}

Inputs inputs_of(const CampaignSpec& spec, int number) {
  check(number >= 1 && number <= case_count(spec), "no such case");
  std::size_t left = static_cast<std::size_t>(number) - 1;
  Inputs grid(spec.grid.size());
  for (std::size_t k = spec.grid.size(); k-- > 0;) {
    const VariedInput& vary = spec.grid[k];
    grid[k] = {vary.path, vary.values[left % vary.values.size()]};
    left /= vary.values.size();
  }
  if (spec.listed.empty()) return grid;
  Inputs inputs = spec.listed[left];
  check(inputs.size() == spec.listed.front().size(), "listed cases name different inputs");
  inputs.insert(inputs.end(), grid.begin(), grid.end());
  return inputs;
}

std::string case_hash(std::string_view text, const CaseIdentity& identity) {
  Digest digest;
  digest.add_text(text);
  digest.add_text(identity.program);
  digest.add_text(identity.results_format);
  digest.add_count(identity.through_time ? 1 : 0);
  for (const std::string& name : identity.watch) digest.add_text(name);
  return digest.hex();
}

namespace {

bool letter(char sign) { return std::isalpha(static_cast<unsigned char>(sign)) != 0 || static_cast<unsigned char>(sign) >= 0x80; }
bool digit(char sign) { return sign >= '0' && sign <= '9'; }

// Whether digits at this place go on with a word: behind a letter, a bracket or a charge, or behind a word's point.
bool within_word(std::string_view text, std::size_t at) {
  if (at == 0) return false;
  const char before = text[at - 1];
  if (letter(before) || before == ')' || before == '_' || before == '^') return true;
  return before == '.' && at >= 2 && (letter(text[at - 2]) || digit(text[at - 2]));
}

// The end of the number that begins at a digit: 12, 1.5, 3e-09.
std::size_t end_of_number(std::string_view text, std::size_t at) {
  const auto digits = [&] { while (at < text.size() && digit(text[at])) ++at; };
  digits();
  if (at + 1 < text.size() && text[at] == '.' && digit(text[at + 1])) {
    ++at;
    digits();
  }
  if (at < text.size() && (text[at] == 'e' || text[at] == 'E')) {
    std::size_t power = at + 1;
    if (power < text.size() && (text[power] == '-' || text[power] == '+')) ++power;
    if (power < text.size() && digit(text[power])) {
      at = power;
      digits();
    }
  }
  return at;
}

}  // namespace

std::string reason_group(std::string_view reason) {
  std::string group;
  for (std::size_t at = 0; at < reason.size();) {
    if (!digit(reason[at])) {
      group += reason[at++];
      continue;
    }
    const bool own = within_word(reason, at);
    const std::size_t end = own ? at + 1 : end_of_number(reason, at);
    if (own) {  // the word's digits as they are
      std::size_t last = end;
      while (last < reason.size() && digit(reason[last])) ++last;
      group += reason.substr(at, last - at);
      at = last;
      continue;
    }
    if (!group.empty() && (group.back() == '-' || group.back() == '+') && (group.size() == 1 || group[group.size() - 2] == ' ')) group.pop_back();  // its sign
    group += '#';
    at = end;
  }
  return group;
}

std::string campaign_digest(const CampaignResult& result) {
  Digest digest;
  for (const std::string& path : result.paths) digest.add_text(path);
  for (const std::string& name : result.watch) digest.add_text(name);
  digest.add_count(static_cast<long long>(result.cases.size()));
  for (const CampaignCase& one : result.cases) {
    digest.add_count(one.number);
    for (const std::string& value : one.inputs) digest.add_text(value);
    digest.add_text(to_string(one.status));
    digest.add_text(one.reason);
    for (double value : one.watched) digest.add_number(value);
  }
  return digest.hex();
}

}  // namespace leat
