"""The top level holds what a newcomer expects and nothing else; examples stay small; scripts can be run."""
import os

from tree import ROOT, files, finish, relative

TOP = {"CMakeLists.txt", "CMakePresets.json", "README.md", "DEVELOPERS.md", "LICENSE", "src", "include", "tests", "jobs",
       "sample_grids"}
LIMITS = {"sample_grids": 6_000_000, "jobs": 300_000, "tests": 8_000_000}  # bytes in all

every = files()
problems = []
top = {relative(path).split("/")[0] for path in every}
problems += [f"{name}: does not belong at the top level" for name in sorted(top - TOP) if not name.startswith(".")]
problems += [f"{name}: missing" for name in sorted(TOP - top)]
for folder, limit in LIMITS.items():
    size = sum(path.stat().st_size for path in every if relative(path).startswith(folder + "/"))
    if size > limit:
        problems.append(f"{folder}: {size} bytes, at most {limit}")
for path in every:
    here = relative(path)
    if here == ".ci/run" or path.suffix == ".sh":
        if not os.access(path, os.X_OK):
            problems.append(f"{here}: not executable")
        text = path.read_text()
        if here != ".ci/run" and "\nset -euo pipefail\n" not in text:
            problems.append(f"{here}: does not stop at the first error (set -euo pipefail)")
    # Kernel bodies (_inl.h) are included once for each instruction set.
    if path.suffix == ".h" and not here.endswith("_inl.h") and not path.read_text().startswith("#pragma once\n"):
        problems.append(f"{here}: does not begin with #pragma once")
finish(problems, len(every))
