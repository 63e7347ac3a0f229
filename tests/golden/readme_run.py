"""The job that README.md shows is the one in jobs, and what README.md says it prints is what it prints.

usage: readme_run.py LAGSCAPE SOURCE_DIR [--write]
The last line (time and memory) and the folder of the result differ from machine to machine and are not compared.
"""
import pathlib
import subprocess
import sys
import tempfile

program, source = sys.argv[1], pathlib.Path(sys.argv[2])
job = source / "jobs" / "harrow_soil_wetness.toml"
readme = source / "README.md"

with tempfile.TemporaryDirectory() as folder:
    result = str(pathlib.Path(folder) / "harrow_memory.nc")
    printed = subprocess.run([program, "run", str(job), "--set", f"output.file={result}"],
                             capture_output=True, text=True, check=True, stdin=subprocess.DEVNULL).stdout
    printed = printed.replace(result, "results/harrow_memory.nc")

sections = {"job": ("toml", job.read_text()), "run": ("text", printed)}
text = readme.read_text()
for name, (language, body) in sections.items():
    begin, end = f"<!-- {name}:begin -->\n", f"<!-- {name}:end -->"
    if text.count(begin) != 1 or text.count(end) != 1:
        sys.exit(f"{readme}: one line {begin.strip()} and one line {end} are needed")
    before, rest = text.split(begin)
    shown, after = rest.split(end)
    fresh = f"```{language}\n{body.rstrip()}\n```\n"

    def comparable(block):
        return [line for line in block.splitlines() if not line.startswith("lagscape ")]

    if "--write" in sys.argv:
        text = before + begin + fresh + end + after
    elif comparable(shown) != comparable(fresh):
        sys.exit(f"{readme}: what it shows of the {name} is stale; bring it up to date by\n"
                 f"  {sys.executable} {' '.join(sys.argv)} --write")
if "--write" in sys.argv:
    readme.write_text(text)
