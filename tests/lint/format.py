"""Sources look as .clang-format says. usage: format.py CLANG_FORMAT"""
import subprocess
import sys

from tree import ROOT, files, finish, relative

sources = [relative(path) for path in files() if path.suffix in {".h", ".cpp"}]
problems = []
for source in sources:
    answer = subprocess.run([sys.argv[1], "--dry-run", "--Werror", source], cwd=ROOT, capture_output=True)
    if answer.returncode != 0:
        problems.append(f"{source}: run clang-format -i on it")
finish(problems, len(sources))
