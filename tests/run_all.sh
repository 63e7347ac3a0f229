#!/bin/bash
# Every test of the project on a bare Debian 12: installs what is missing, builds with warnings as errors, runs ctest.
# The last line is "N passed, N failed"; the exit code is 0 only if nothing failed.
# The sanitizers need a build of their own and several times as long; they are tests/ci/sanitize.sh.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."

broken() { echo "$1"; echo "0 passed, 1 failed"; exit 1; }
jobs/setup_debian.sh --tests || broken "Packages that the tests need could not be installed."
cmake --preset dev >/dev/null || broken "The project could not be configured."
cmake --build --preset dev || broken "The project could not be built."

log=.build/dev/ctest.log
code=0
ctest --preset dev -j2 --no-tests=error | tee "$log" || code=$?
# ctest ends with "98% tests passed, 2 tests failed out of 123".
counts=$(sed -nE 's/^[0-9]+% tests passed, ([0-9]+) tests? failed out of ([0-9]+).*/\1 \2/p' "$log" | tail -1)
[[ $counts ]] || broken "ctest did not finish."
read -r failed total <<<"$counts"
echo "$((total - failed)) passed, $failed failed"
exit $code
