"""Sources are ASCII, without words that do not belong here, without promises instead of code, and tests are not disabled."""
import re

from tree import files, finish, is_text, relative

# Put together here so that this file does not contain them itself.
FORBIDDEN = ["lec" + "ture", "tran" + "script", "the cou" + "rse", "/wo" + "rk/", "/ro" + "ot/", "../sha" + "red"]
UNFINISHED = [r"\bTO" + r"DO\b", r"\bFIX" + r"ME\b", r"\bXX" + r"X\b", r"\bDIS" + r"ABLED_", r"\bGTEST_" + r"SKIP\b",
              r"\bDIS" + r"ABLED\s+(TRUE|ON|1)\b", r"\bSKIP_" + r"RETURN_CODE\b", r"unittest\.sk" + r"ip"]
WIDTH = 130  # of code; clang-format has its own, smaller limit

forbidden = re.compile("|".join(re.escape(word) for word in FORBIDDEN), re.I)
unfinished = re.compile("|".join(UNFINISHED))
problems, checked = [], 0
for path in files():
    here = relative(path)
    if not is_text(path):
        continue
    checked += 1
    data = path.read_bytes()
    for number, line in enumerate(data.split(b"\n"), 1):
        if not line.isascii() and here != "LICENSE":
            problems.append(f"{here}:{number}: not ASCII")
        text = line.decode("utf-8", "replace")
        if found := forbidden.search(text):
            problems.append(f"{here}:{number}: '{found.group()}' must not be mentioned here")
        if found := unfinished.search(text):
            problems.append(f"{here}:{number}: unfinished or disabled: '{found.group()}'")
        if path.suffix in {".h", ".cpp", ".py", ".cmake"} and len(text) > WIDTH:
            problems.append(f"{here}:{number}: {len(text)} columns, at most {WIDTH}")
        if b"\t" in line and path.suffix in {".h", ".cpp", ".py", ".txt", ".cmake", ".toml"}:
            problems.append(f"{here}:{number}: tab")
    if data and not data.endswith(b"\n"):
        problems.append(f"{here}: does not end with a line end")
finish(problems, checked)
