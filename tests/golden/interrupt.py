"""Ctrl-C while jobs run ends with exit code 130 and leaves no result; on a terminal the progress line shows and goes away.

usage: interrupt.py PROGRAM SOURCE_FOLDER

The job is read from a named pipe, so that the signal comes for certain while the program works.
"""
import os
import pathlib
import pty
import signal
import subprocess
import sys
import tempfile
import time

program, source = pathlib.Path(sys.argv[1]).resolve(), pathlib.Path(sys.argv[2]).resolve()
job = f"""[input]
files = "{source}/sample_grids/harrow_soil_wetness_*.nc"
variable = "soil_wetness"
[output]
file = "result.nc"
"""


def waits_for_pipe(process):
    """True once the program sleeps, which it does only to wait for the job from the pipe."""
    return pathlib.Path(f"/proc/{process.pid}/stat").read_text().rsplit(")", 1)[1].split()[0] == "S"


with tempfile.TemporaryDirectory() as folder:
    pipe = pathlib.Path(folder) / "job.toml"
    os.mkfifo(pipe)
    process = subprocess.Popen([program, "run", pipe], cwd=folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
    for _ in range(300):
        time.sleep(0.1)
        if waits_for_pipe(process):
            break
    time.sleep(0.5)
    process.send_signal(signal.SIGINT)
    with open(pipe, "w") as end:
        end.write(job)
    out, err = process.communicate(timeout=120)
    assert process.returncode == 130, (process.returncode, err)
    assert out == "" and err.startswith("error: interrupted"), (out, err)
    left = [name for name in os.listdir(folder) if name != "job.toml"]
    assert not left, left

with tempfile.TemporaryDirectory() as folder:
    path = pathlib.Path(folder) / "job.toml"
    path.write_text(job)
    ours, theirs = pty.openpty()
    process = subprocess.Popen([program, "run", path], cwd=folder, stdout=subprocess.PIPE, stderr=theirs, text=True)
    out, _ = process.communicate(timeout=300)
    os.close(theirs)
    shown = b""
    try:
        while piece := os.read(ours, 65536):
            shown += piece
    except OSError:  # the end of a terminal is told as an error
        pass
    lines = shown.decode().split("\r")
    assert process.returncode == 0, shown
    assert any(" cells/s" in line for line in lines), shown
    assert lines[-1].strip() == "", shown
    assert "cells/s" in out and "\r" not in out, out

    quiet = subprocess.run([program, "run", path, "--replace"], cwd=folder, capture_output=True, text=True, check=True)
    assert "cells/s," not in quiet.stderr and "\r" not in quiet.stderr, quiet.stderr
