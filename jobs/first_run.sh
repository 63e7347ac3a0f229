#!/bin/bash
# From a bare Debian 12 to a first result: installs what is missing, builds the program, runs one job.
# Can be run from anywhere and again; the result of an earlier first run is replaced.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

jobs/setup_debian.sh
cmake --preset release >/dev/null
cmake --build --preset release
program=$PWD/.build/release/lagscape
result=$PWD/results/harrow_memory.nc
"$program" run jobs/harrow_soil_wetness.toml --replace
[[ -s $result ]] || { echo "jobs/harrow_soil_wetness.toml did not write $result" >&2; exit 1; }

cat <<END

The program is $program
The result is  $result
  In QGIS: Layer > Add Raster Layer, choose that file, then the map decorrelation_time.
  With GDAL: gdal_translate NETCDF:$result:decorrelation_time memory.tif
  What a map means: $program explain decorrelation_time
Your own files: $program survey FILE... --write-job my_job.toml
END
