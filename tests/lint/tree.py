"""What the lint tests share: the files of the project and a way to end with all problems listed."""
import pathlib
import subprocess
import sys

ROOT = pathlib.Path(__file__).resolve().parents[2]


def files():
    """Every file of the project, committed or about to be; what .gitignore names is left out."""
    listed = subprocess.run(["git", "-C", str(ROOT), "ls-files", "-z", "--cached", "--others", "--exclude-standard"],
                            capture_output=True)
    if listed.returncode == 0:
        names = listed.stdout.decode().split("\0")
    else:  # not a clone: an unpacked archive
        away = {".git", ".build", "results", "__pycache__"}
        names = [str(path.relative_to(ROOT)) for path in ROOT.rglob("*")
                 if not away.intersection(path.relative_to(ROOT).parts)]
    return sorted(path for path in (ROOT / name for name in names if name) if path.is_file())


def relative(path):
    return path.relative_to(ROOT).as_posix()


def is_text(path):
    return path.suffix not in {".nc", ".png"}


def finish(problems, checked):
    """Ends the test: every problem on a line of its own. A check that looked at nothing has failed."""
    if checked == 0:
        problems = ["nothing was checked"]
    for problem in problems:
        print(problem)
    print(f"{checked} checked, {len(problems)} problems")
    sys.exit(1 if problems else 0)
