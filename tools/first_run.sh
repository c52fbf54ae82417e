#!/bin/sh
# From a bare Debian 12 to the first result: packages, build, the first example. Safe to repeat.
set -eu
cd "$(dirname "$0")/.."
. tools/packages.sh
need $build_packages
cmake --preset release -DLEAT_TESTS=OFF -DLEAT_BENCHMARKS=OFF
cmake --build --preset release --target leat
build/release/tools/leat run flowsheets/1_ammine_residue.yaml
echo
echo "Look at:   outputs/1_ammine_residue.h5   (ncdump -h, h5py or xarray; outputs/README.md names every variable)"
echo "As a page: build/release/tools/leat report outputs/1_ammine_residue.h5"
echo "Next:      build/release/tools/leat check flowsheets/2_cyano_ore.yaml"
