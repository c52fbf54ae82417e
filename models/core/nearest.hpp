// nearest: the known word a mistyped one was most likely meant to be.
//   distance: Damerau-Levenshtein in its restricted form (insert, delete, replace, swap of neighbours; each costs 1)
//   near:     distance <= max(2, length of the word / 3) and below the length of the word, counted in bytes
#pragma once

#include <span>
#include <string>
#include <string_view>

namespace leat {

// Edits that turn one word into the other [1].
int edit_distance(std::string_view a, std::string_view b);

// The nearest candidate, judged first without regard to case, then with it, then by the order given;
// "" when none is near.
std::string nearest(std::string_view word, std::span<const std::string> candidates);

// "; did you mean 'x'?", or "" when none is near.
std::string did_you_mean(std::string_view word, std::span<const std::string> candidates);

}  // namespace leat
