"""Ctrl-C, a request to end or a closed terminal, while jobs run or data are forged, end the program with exit code 130 and
leave no file; on a terminal the progress line of a run shows and goes away.

usage: interrupt.py PROGRAM SOURCE_FOLDER

Jobs are read from a named pipe, so that the signal comes for certain while the program works; a forge is stopped when its
hidden file is seen.
"""
import fcntl
import os
import pathlib
import pty
import signal
import struct
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


recipe = """[time]
start = "1981-01-01"
steps = 100000
step = "P1D"
[grid]
kind = "latlon"
rows = 200
cols = 200
lat = [50, 45]
lon = [0, 5]
[[variable]]
name = "wetness"
units = "1"
[[patch]]
name = "loam"
ar = [0.6]
[output]
folder = "out"
name = "made"
"""
SIGNALS = (signal.SIGINT, signal.SIGTERM, signal.SIGHUP)


def open_terminal(folder):
    """Both ends of a terminal. An empty root without /dev/pts gets terminals of its own, mounted in the folder."""
    try:
        return pty.openpty()
    except OSError:
        place = pathlib.Path(folder) / "terminals"
        place.mkdir()
        subprocess.run(["mount", "-t", "devpts", "-o", "newinstance,ptmxmode=0666", "none", place], check=True)
        try:
            ours = os.open(place / "ptmx", os.O_RDWR | os.O_NOCTTY)
            unlock, number = 0x40045431, 0x80045430  # TIOCSPTLCK and TIOCGPTN of Linux
            fcntl.ioctl(ours, unlock, struct.pack("i", 0))
            name = struct.unpack("i", fcntl.ioctl(ours, number, struct.pack("i", 0)))[0]
            return ours, os.open(place / str(name), os.O_RDWR | os.O_NOCTTY)
        finally:
            subprocess.run(["umount", "--lazy", place], check=True)


def start(folder, *words):
    """The program, stopped by signals even where whoever runs the tests has switched them off."""
    def heed_signals():
        for each in SIGNALS:
            signal.signal(each, signal.SIG_DFL)
    return subprocess.Popen([program, *words], cwd=folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
                            preexec_fn=heed_signals)


def until(condition):
    for _ in range(600):
        if condition():
            return
        time.sleep(0.05)
    sys.exit("the program did not come to where it was to be stopped")


def ends_as_interrupted(process, folder, given):
    out, err = process.communicate(timeout=120)
    assert process.returncode == 130, (process.returncode, err)
    assert out == "" and err.splitlines()[-1].startswith("error: interrupted"), (out, err)
    assert os.listdir(folder) == [given], os.listdir(folder)


for each in SIGNALS:
    with tempfile.TemporaryDirectory() as folder:
        pipe = pathlib.Path(folder) / "job.toml"
        os.mkfifo(pipe)
        process = start(folder, "run", pipe)
        until(lambda: waits_for_pipe(process))
        time.sleep(0.5)
        process.send_signal(each)
        with open(pipe, "w") as end:
            end.write(job)
        ends_as_interrupted(process, folder, "job.toml")

    with tempfile.TemporaryDirectory() as folder:
        (pathlib.Path(folder) / "recipe.toml").write_text(recipe)
        process = start(folder, "forge", "recipe.toml")
        until(lambda: list(pathlib.Path(folder).glob("out/.*.part")))
        process.send_signal(each)
        ends_as_interrupted(process, folder, "recipe.toml")

with tempfile.TemporaryDirectory() as folder:  # a second signal, of any kind, does not wait for a tidy end
    pipe = pathlib.Path(folder) / "recipe.toml"
    os.mkfifo(pipe)
    process = start(folder, "forge", pipe)
    until(lambda: waits_for_pipe(process))
    time.sleep(0.5)
    process.send_signal(signal.SIGINT)
    time.sleep(0.2)
    process.send_signal(signal.SIGTERM)
    process.communicate(timeout=60)
    assert process.returncode == -signal.SIGTERM, process.returncode

with tempfile.TemporaryDirectory() as folder:
    path = pathlib.Path(folder) / "job.toml"
    path.write_text(job)
    ours, theirs = open_terminal(folder)
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
