#include "models/core/nearest.hpp"

#include <algorithm>
#include <utility>
#include <vector>

namespace leat {
namespace {

std::string lower(std::string_view word) {
  std::string result(word);
  for (char& c : result) {
    if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
  }
  return result;
}

}  // namespace

int edit_distance(std::string_view a, std::string_view b) {
  // Three rows of the table of distances between beginnings of a and b: two back, one back, and the present one.
  const std::size_t width = b.size() + 1;
  std::vector<int> two_back(width), back(width), present(width);
  for (std::size_t j = 0; j < width; ++j) back[j] = static_cast<int>(j);
  for (std::size_t i = 1; i <= a.size(); ++i) {
    present[0] = static_cast<int>(i);
    for (std::size_t j = 1; j < width; ++j) {
      const int replaced = back[j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1);
      present[j] = std::min({back[j] + 1, present[j - 1] + 1, replaced});
      const bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped) present[j] = std::min(present[j], two_back[j - 2] + 1);
    }
    std::swap(two_back, back);
    std::swap(back, present);
  }
  return back[b.size()];
}

std::string nearest(std::string_view word, std::span<const std::string> candidates) {
  constexpr std::size_t longest_word = 200;  // longer text is no mistyped name [byte]
  if (word.empty() || word.size() > longest_word) return "";
  const int size = static_cast<int>(word.size());
  const int limit = std::max(2, size / 3);
  const std::string small = lower(word);
  const std::string* best = nullptr;
  std::pair<int, int> best_distance;
  for (const std::string& candidate : candidates) {
    const int length_gap = std::abs(static_cast<int>(candidate.size()) - size);
    if (length_gap > limit) continue;
    const int distance = edit_distance(small, lower(candidate));
    if (distance > limit || (distance > 0 && distance >= size)) continue;
    const std::pair<int, int> judged{distance, edit_distance(word, candidate)};
    if (best == nullptr || judged < best_distance) {
      best = &candidate;
      best_distance = judged;
    }
  }
  return best == nullptr ? "" : *best;
}

std::string did_you_mean(std::string_view word, std::span<const std::string> candidates) {
  const std::string found = nearest(word, candidates);
  return found.empty() ? "" : "; did you mean '" + found + "'?";
}

}  // namespace leat
