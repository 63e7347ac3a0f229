"""The table of maps in README.md is the one the catalogue gives.

usage: readme_maps.py PRINT_CATALOGUE README.md [--write]
"""
import pathlib
import subprocess
import sys

BEGIN, END = "<!-- maps:begin -->\n", "<!-- maps:end -->"
catalogue = subprocess.run([sys.argv[1]], capture_output=True, text=True, check=True).stdout
readme = pathlib.Path(sys.argv[2])
text = readme.read_text()
if text.count(BEGIN) != 1 or text.count(END) != 1:
    sys.exit(f"{readme}: the table of maps has to stand between one line {BEGIN.strip()} and one line {END}")
before, rest = text.split(BEGIN)
table, after = rest.split(END)
if "--write" in sys.argv:
    readme.write_text(before + BEGIN + catalogue + END + after)
elif table != catalogue:
    sys.exit(f"{readme}: the table of maps is stale; bring it up to date by\n  {sys.executable} {' '.join(sys.argv)} --write")
