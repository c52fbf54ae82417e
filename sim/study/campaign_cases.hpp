// The cases of a campaign: which there are, in which order, and what each is known by.
//   order: the listed cases one by one; within each every combination of the grid, the last input varying fastest
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "sim/study/campaign_result.hpp"
#include "sim/study/study_spec.hpp"

namespace leat {

// A part of a campaign for one of several machines: the cases with (number - 1) mod of = index - 1.
struct Shard {
  int index = 1, of = 1;
  bool whole() const { return of == 1; }
  bool holds(int number) const { return (number - 1) % of == index - 1; }
  std::string text() const;        // "2/3"; empty for the whole
};
std::optional<Shard> read_shard(std::string_view text);  // "2/3"; nothing if it is no such thing

inline constexpr int most_cases = 1'000'000;

using Inputs = std::vector<std::pair<std::string, std::string>>;  // path, value as typed

long long case_count(const CampaignSpec& spec);          // one more than most_cases stands for anything beyond
std::vector<std::string> varied_paths(const CampaignSpec& spec);
std::vector<std::string> varied_units(const CampaignSpec& spec);
Inputs inputs_of(const CampaignSpec& spec, int number);  // of a case, from 1, in the order of varied_paths

// Of all that decides a case's result.
struct CaseIdentity {
  std::string_view program, results_format;
  bool through_time = true;
  const std::vector<std::string>& watch;
};
std::string case_hash(std::string_view text, const CaseIdentity& identity);

// A reason without the case's own numbers, so that equal causes read alike: "tank.yaml:14:21: 6 kg is not a time" gives
// "tank.yaml:#:#: # kg is not a time". Digits that belong to a word (L.1, NH3, Cu(NH3)4^2+) stay.
std::string reason_group(std::string_view reason);

// Of all rows in their order but for their seconds and file names: inputs, status, reason and watched values bit by bit.
std::string campaign_digest(const CampaignResult& result);

}  // namespace leat
