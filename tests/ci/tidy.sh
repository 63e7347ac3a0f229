#!/bin/bash
# clang-tidy over the program's sources with the checks of .clang-tidy; any finding is an error.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."
jobs/setup_debian.sh --tidy
cmake --preset tidy >/dev/null
# version.h and the like are made when configuring, so nothing has to be built first.
run-clang-tidy -quiet -p .build/tidy "^$PWD/src/.*\.cpp$"
