#!/bin/bash
# The whole test suite with the address and undefined-behaviour sanitizers. Arguments go to ctest (-R NAME, -LE slow).
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."
jobs/setup_debian.sh --tests
cmake --preset sanitize >/dev/null
cmake --build --preset sanitize
ctest --preset sanitize -j2 --no-tests=error "$@"
