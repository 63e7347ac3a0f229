"""Runs every example at the end of every help text, in a copy of jobs/ and sample_grids/; each has to end with exit code 0.

usage: examples.py PROGRAM SOURCE_FOLDER COMMAND   (COMMAND "help": those of the program itself)
"""
import os
import pathlib
import shutil
import subprocess
import sys
import tempfile

program, source, command = pathlib.Path(sys.argv[1]).resolve(), pathlib.Path(sys.argv[2]), sys.argv[3]
asked = [program, "--help"] if command == "help" else [program, command, "--help"]
shown = subprocess.run(asked, capture_output=True, text=True, check=True).stdout
listing = shown.split("\nExamples:\n")[1].split("\n\n")[0]
examples = listing.replace("\\\n", " ").splitlines()
assert examples and all(line.startswith("  lagscape ") for line in examples), listing

with tempfile.TemporaryDirectory() as folder:
    for name in ("jobs", "sample_grids"):
        shutil.copytree(source / name, pathlib.Path(folder) / name)
    bin_folder = pathlib.Path(folder) / "bin"
    bin_folder.mkdir()
    (bin_folder / "lagscape").symlink_to(program)
    environment = os.environ | {"PATH": f"{bin_folder}:{os.environ['PATH']}"}
    for example in examples:
        print("$", example.strip(), flush=True)
        subprocess.run(["bash", "-c", example], cwd=folder, env=environment, check=True, stdin=subprocess.DEVNULL)
