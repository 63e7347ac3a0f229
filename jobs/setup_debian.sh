#!/bin/bash
# Installs the Debian 12 packages that are missing, and nothing else. Root is needed only when something is missing.
# usage: jobs/setup_debian.sh [--tests] [--tidy]     without an option: what it takes to build and run the program
# This is the only list of packages in the project.
set -euo pipefail

packages=(g++ cmake ninja-build pkg-config libnetcdf-dev libnetcdf-c++4-dev libhdf5-dev libudunits2-dev libdeflate-dev
  libeigen3-dev libboost-dev libfmt-dev libcli11-dev libtomlplusplus-dev)
tests=(libgtest-dev nlohmann-json3-dev netcdf-bin gdal-bin git
  python3 python3-netcdf4 python3-numpy python3-scipy python3-statsmodels)
tidy=(clang clang-format clang-tidy libomp-dev)

for option in "$@"; do
  case $option in
    --tests) packages+=("${tests[@]}") ;;
    --tidy) packages+=("${tests[@]}" "${tidy[@]}") ;;
    *) sed -n '2,4p' "$0" >&2; exit 2 ;;
  esac
done

command -v apt-get >/dev/null || {
  echo "This script knows Debian only. Install the equivalents of: ${packages[*]}" >&2
  exit 1
}
missing=()
for package in "${packages[@]}"; do
  [[ $(dpkg-query -W -f='${db:Status-Status}' "$package" 2>/dev/null) == installed ]] || missing+=("$package")
done
[[ ${#missing[@]} -gt 0 ]] || exit 0

as_root=()
if [[ $(id -u) != 0 ]]; then
  command -v sudo >/dev/null || { echo "As root, run: apt-get install ${missing[*]}" >&2; exit 1; }
  as_root=(sudo)
fi
echo "Installing ${#missing[@]} Debian packages: ${missing[*]}" >&2
log=$(mktemp)
trap 'rm -f "$log"' EXIT
quietly() { "$@" >"$log" 2>&1 </dev/null || { tail -20 "$log" >&2; exit 1; }; }
[[ ${#as_root[@]} -eq 0 ]] || sudo -v  # asks for the password here, not behind the log
quietly "${as_root[@]}" apt-get update
quietly "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y --no-install-recommends "${missing[@]}"
