// hdf5_file: writes a ResultSet as HDF5 that is netCDF-4 with CF conventions as well, and reads it back.
// Equal data gives equal bytes: no time stamps, no uninitialised padding.
#pragma once

#include <optional>
#include <string>

#include "sim/results/result_set.hpp"
#include "sim/results/whole_file.hpp"

namespace leat {

// Throws std::logic_error when the set contradicts itself (check_result_set). Trouble with the machine, such as a full
// disk, is an outcome with a message; then no file appears and an earlier one stays. Threads may call at once and wait.
FileOutcome write_result_file(const ResultSet& results, const std::string& path);

// Reads all that write_result_file wrote. Without a value, fault says why, beginning with the path.
// An axis without entries comes back as unlimited: see the writer.
std::optional<ResultSet> read_result_file(const std::string& path, std::string& fault);

}  // namespace leat
