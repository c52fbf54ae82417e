#pragma once
#include "sim/results/result_tables.hpp"

namespace leat {

// Tables of one kind of file, in the order in which they are shown.
std::vector<ResultTable> run_tables(const ResultSet& results);
std::vector<ResultTable> beaker_tables(const ResultSet& results);
std::vector<ResultTable> ladder_tables(const ResultSet& results);

inline constexpr double seconds_an_hour = 3600;
inline double percent(double share) { return 100 * share; }

// Joined by ", "; "-" for nothing.
std::string listed(const std::vector<std::string>& words);

}  // namespace leat
