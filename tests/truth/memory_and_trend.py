"""Does the program find the memory that was put in?  memory_and_trend.py LAGSCAPE FOLDER

Forges trend-free grids of known memory (600 months, 4000 cells a kind), complete and with gaps, runs a job on each and compares:
- the median of decorrelation_time with the truth, within 5 %;
- how often decorrelation_time_low .. _high hold the truth: 90 to 97 % for limits of nominal 95 %;
- how often ols-neff at p <= .05 finds a trend where there is none: .05 +- .015, for white noise and AR(1) up to .6.
The bars are the project's own (common practice, no published source).
"""
import os
import shutil
import subprocess
import sys

import netCDF4
import numpy as np

CASES = {
    "complete": [],
    "20 % random": ["--set", "gaps.random=0.2"],
    "3 of 12 months": ["--set", "gaps.months=[12, 1, 2]"],
}
TREND_KINDS = ("white", "ar1_0.3", "ar1_0.6")
TAU_TOLERANCE, COVERAGE, ALARMS = 0.05, (0.90, 0.97), (0.035, 0.065)

here = os.path.dirname(os.path.abspath(__file__))
lagscape, folder = sys.argv[1:3]
failures = []


def outside(share, low, high):
    return not low <= share <= high


def read_maps(path, *names):
    with netCDF4.Dataset(path) as file:
        return [np.ma.filled(file.variables[name][:].astype(float), np.nan) for name in names]


def run(command, file, *options):
    subprocess.run([lagscape, command, os.path.join(here, file), "--quiet", *options], check=True, stdout=subprocess.DEVNULL)


def made(case, number):
    """Forges the grid of a case and runs the job on it; the result and the truth."""
    place = os.path.join(folder, f"case_{number}")
    shutil.rmtree(place, ignore_errors=True)
    result = os.path.join(place, "memory.nc")
    run("forge", "memory_recipe.toml", "--set", f"output.folder={place}", *CASES[case])
    run("run", "memory_job.toml", "--set", f"input.files={place}/known.nc", "--set", f"output.file={result}")
    return result, os.path.join(place, "truth_known.nc")


def check_kind(case, kind, truth, tau, low, high, p, slope):
    cells = tau.size
    none = int(np.isnan(tau).sum() + np.isnan(p).sum())
    ratio = np.nanmedian(tau) / truth
    covered = np.mean((low <= truth) & (truth <= high))
    alarms = np.mean(p <= 0.05)
    slope_error = np.nanmean(slope) / (np.nanstd(slope) / np.sqrt(cells))
    wrong = []
    if none:
        wrong.append(f"{none} cells without a value")
    if kind != "white":
        if abs(ratio - 1) > TAU_TOLERANCE:
            wrong.append("median")
        if outside(covered, *COVERAGE):
            wrong.append("limits")
    if kind in TREND_KINDS and outside(alarms, *ALARMS):
        wrong.append("alarms")
    if abs(slope_error) > 4:
        wrong.append("mean slope is not 0")
    print(f"{case:15} {kind:13} {cells:6d} {truth:8.3f} {np.nanmedian(tau):8.3f} {ratio:6.3f} {covered:8.3f} {alarms:7.3f}",
          ", ".join(wrong))
    failures.extend(f"{case}, {kind}: {text}" for text in wrong)


print(f"{'gaps':15} {'memory':13} {'cells':>6} {'truth':>8} {'median':>8} {'ratio':>6} {'covered':>8} {'alarms':>7}")
for number, case in enumerate(CASES):
    result, truth_file = made(case, number)
    maps = read_maps(result, "decorrelation_time", "decorrelation_time_low", "decorrelation_time_high", "trend_p", "trend_slope")
    truth, patch = read_maps(truth_file, "decorrelation_time", "patch")
    with netCDF4.Dataset(truth_file) as file:
        kinds = file.variables["patch"].flag_meanings.split()
    for number_of_kind, kind in enumerate(kinds):
        where = patch == number_of_kind
        assert where.sum() >= 4000 and maps[0].shape == patch.shape
        check_kind(case, kind, truth[where][0], *(one[where] for one in maps))
if failures:
    print("\nnot as known:\n  " + "\n  ".join(failures))
    sys.exit(1)
shutil.rmtree(folder)
