"""One kind of bad input: the documented exit code, one message that names place and remedy, nothing left behind.

usage: bad_input.py PROGRAM CASE      bad_input.py --list
"""
import pathlib
import re
import subprocess
import sys
import tempfile

from cases import CASES


def contents(folder):
    return {str(path.relative_to(folder)): path.read_bytes() if path.is_file() else None for path in sorted(folder.rglob("*"))}


def main(program, name):
    problems = []
    with tempfile.TemporaryDirectory() as where:
        folder = pathlib.Path(where)
        expect = CASES[name](folder)
        if expect.job:
            (folder / "job.toml").write_text(expect.job)
        before = contents(folder)
        answer = subprocess.run([program, *expect.arguments], cwd=folder, capture_output=True, text=True, timeout=120)
        after = contents(folder)
    if answer.returncode != expect.code:
        problems.append(f"exit code {answer.returncode}, expected {expect.code}")
    for pattern in expect.says:
        if not re.search(pattern, answer.stderr):
            problems.append(f"the message does not say /{pattern}/")
    if answer.stderr.count("error: ") != 1:
        problems.append(f"{answer.stderr.count('error: ')} errors were told, expected one block")
    if "bug of ours" in answer.stderr or "HDF5-DIAG" in answer.stderr:
        problems.append("the message speaks of the program's own trouble")
    if answer.stdout:
        problems.append("something was printed on stdout")
    for path in sorted(set(before) | set(after)):
        if path not in before:
            problems.append(f"{path} was left behind")
        elif path not in after or before[path] != after[path]:
            problems.append(f"{path} was changed or removed")
    if problems:
        print("\n".join(problems))
        print("--- stderr ---\n" + answer.stderr + "--- stdout ---\n" + answer.stdout)
        sys.exit(1)


if __name__ == "__main__":
    if sys.argv[1:] == ["--list"]:
        print(*CASES, sep="\n")
    else:
        main(sys.argv[1], sys.argv[2])
