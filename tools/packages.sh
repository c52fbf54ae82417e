# Sourced by the scripts beside it: need PACKAGE... installs what is missing on Debian 12.
need() {
  missing=""
  for package in "$@"; do
    dpkg-query -W -f='${Status}' "$package" 2>/dev/null | grep -q "ok installed" || missing="$missing $package"
  done
  [ -n "$missing" ] || return 0
  as_root=""
  if [ "$(id -u)" -ne 0 ]; then
    command -v sudo >/dev/null || { echo "run this as root, or install sudo: packages are missing:$missing" >&2; exit 1; }
    as_root="sudo"
  fi
  echo "installing (on a bare system about 300 to 500 MB to download, 3 GB on disk with the build, some minutes):$missing"
  $as_root apt-get update -q
  $as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends $missing
}
build_packages="g++ cmake ninja-build pkg-config ccache libsundials-dev libsuitesparse-dev libeigen3-dev libyaml-cpp-dev
  libhdf5-dev libudunits2-dev libfmt-dev libcli11-dev nlohmann-json3-dev libsqlite3-dev libxxhash-dev"
test_packages="libgtest-dev libbenchmark-dev netcdf-bin hdf5-tools python3 python3-yaml python3-numpy python3-xarray python3-netcdf4
  python3-h5py"
# Scripts of the page and the browser that tests it, unless other packages brought them.
command -v npm >/dev/null || build_packages="$build_packages nodejs npm"
command -v chromium >/dev/null || test_packages="$test_packages chromium"
