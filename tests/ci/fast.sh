#!/bin/bash
# Builds with warnings as errors and runs the unit tests only (label fast): the loop while writing code.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."
jobs/setup_debian.sh --tests
cmake --preset dev >/dev/null
cmake --build --preset dev
ctest --preset dev -j2 --no-tests=error -L fast
