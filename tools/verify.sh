#!/bin/sh
# From a bare Debian 12 to all tests: packages, build, ctest. Safe to repeat. Ends with the summary of ctest.
set -eu
cd "$(dirname "$0")/.."
. tools/packages.sh
need $build_packages $test_packages
cmake --preset release -DLEAT_TESTS=ON -DLEAT_BENCHMARKS=ON
cmake --build --preset release
exec ctest --preset release -j 2
