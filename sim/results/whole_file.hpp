// whole_file: puts a file in its place whole or not at all. The bytes go to a temporary name beside the target, are
// forced to disk and then renamed, so that a name never stands for half a file, whenever the program is killed.
#pragma once

#include <cstddef>
#include <span>
#include <string>

namespace leat {

struct FileOutcome {
  bool ok = false;
  std::string message;  // why not, beginning with the path; empty when ok
};

// Creates missing folders and replaces an earlier file of that name. On failure the earlier file stays as it was and
// the temporary is removed. A killed run may leave "PATH.partial-<16 hex digits>", which nothing ever reads.
FileOutcome write_whole_file(const std::string& path, std::span<const std::byte> bytes);

}  // namespace leat
