"""Compares whole what a command line prints, and its exit code, with what is written down in a case.

usage: cases.py PROGRAM CASE.txt            compares
       cases.py --write PROGRAM CASE.txt... writes what is printed now (read it before you commit it)

A case begins with the lines "$ lagscape ARGUMENTS" and "exit CODE"; then follow the output ("--- stdout") and the messages
("--- stderr"). It runs in a folder of its own that holds a copy of tests/golden/files.
"""
import difflib
import pathlib
import re
import shlex
import shutil
import subprocess
import sys
import tempfile

HERE = pathlib.Path(__file__).resolve().parent


def printed(program, command):
    """The whole case as the program answers now."""
    words = shlex.split(command)
    assert words[0] == "lagscape", command
    with tempfile.TemporaryDirectory() as folder:
        shutil.copytree(HERE / "files", folder, dirs_exist_ok=True)
        answer = subprocess.run([program, *words[1:]], cwd=folder, capture_output=True, text=True, stdin=subprocess.DEVNULL)
        out, err = (text.replace(folder, "FOLDER") for text in (answer.stdout, answer.stderr))
    return f"$ {command}\nexit {answer.returncode}\n--- stdout\n{out}--- stderr\n{err}"


write = sys.argv[1] == "--write"
program, *paths = sys.argv[2 if write else 1:]
failed = False
for path in map(pathlib.Path, paths):
    expected = path.read_text()
    command = re.match(r"\$ (.+)\n", expected).group(1)
    found = printed(program, command)
    if write:
        path.write_text(found)
    elif found != expected:
        failed = True
        print("".join(difflib.unified_diff(expected.splitlines(True), found.splitlines(True), str(path), "printed now")))
sys.exit(failed)
