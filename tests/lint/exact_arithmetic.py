"""No flag that lets the compiler forget NaN: not in the build as configured, and the build refuses to be given one.

usage: exact_arithmetic.py BUILD_FOLDER CMAKE
"""
import pathlib
import re
import subprocess
import sys
import tempfile

from tree import ROOT, files, finish, relative

LOOSE = re.compile(r"-ffast-math|-Ofast|-ffinite-math-only|-funsafe-math-optimizations|-fassociative-math")
build, cmake = pathlib.Path(sys.argv[1]), sys.argv[2]
problems, checked = [], 0

for plan in [*build.glob("*.ninja"), *build.glob("**/flags.make")]:
    checked += 1
    if found := LOOSE.search(plan.read_text()):
        problems.append(f"{plan}: compiled with {found.group()}")
for path in files():
    if path.suffix in {".h", ".cpp"}:
        checked += 1
        if re.search(r"#\s*pragma\s+(GCC|clang)\s+(optimize|fp)|__attribute__\s*\(\(\s*optimize", path.read_text()):
            problems.append(f"{relative(path)}: changes the floating-point rules for a part of the code")
with tempfile.TemporaryDirectory() as folder:
    answer = subprocess.run([cmake, "-S", str(ROOT), "-B", folder, "-G", "Ninja", "-DCMAKE_CXX_FLAGS=-ffast-math"],
                            capture_output=True, text=True)
    checked += 1
    if answer.returncode == 0 or "would silently break missing values" not in " ".join(answer.stderr.split()):
        problems.append(f"cmake -DCMAKE_CXX_FLAGS=-ffast-math is not refused: {answer.stderr}")
finish(problems, checked)
