// A campaign of toy cases: two inputs, two watched numbers, and words that make a case misbehave.
#pragma once

#include <string>
#include <vector>

#include "sim/study/campaign.hpp"
#include "sim/study/ledger.hpp"

namespace leat::test {

// A folder of its own, removed at the end.
class ToyFolder {
 public:
  ToyFolder();
  ~ToyFolder();
  std::string path(const std::string& name) const { return folder_ + "/" + name; }

 private:
  std::string folder_;
};

// Every pair of a value of `first` and one of `second`. A value is a number, or a word: crash, abort, exit, throw, hang,
// fault, unsolved, trouble, hungry, bare (has no `product`), slow (a tenth of a second).
CampaignSpec toy_spec(const std::vector<std::string>& first, const std::vector<std::string>& second);
std::vector<std::string> numbers(int count);  // "1", "2" ...

// Watched: sum and product. The results file holds the case's text.
CampaignWork toy_work();
CampaignSettings toy_settings(const std::string& ledger, int workers = 2);

CampaignResult contents(const std::string& ledger);  // read_ledger, which must succeed

}  // namespace leat::test
