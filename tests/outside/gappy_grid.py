"""A gappy, packed, monthly grid of 40 cells over 40 years, made here, against the oracle. usage: gappy_grid.py PROGRAM"""
import pathlib
import sys
import tempfile

import netCDF4
import numpy as np

import check
import oracle

ROWS, COLS, YEARS = 5, 8, 40
STEPS = 12 * YEARS
MISSING, HOLES, ABSENT = -32768, [-32001, -32002], [37, 200, 201, 333]  # fill, missing values, steps no file holds
SCALE, OFFSET = 0.002, 11.5
JOB = """
title = "Invented grid with known holes"
[input]
files = ["grid.nc"]
variable = "warmth"
[prepare]
min_share = 0.45
[memory]
max_lag = 36
[output]
file = "maps.nc"
maps = ["all"]
cubes = ["autocorrelation", "autocorrelation_limit", "partial_autocorrelation", "autocovariance", "pair_count",
         "ar_coefficients"]
"""
# The same grid with every choice made otherwise; the trend then has a fit of its own.
OTHERWISE = {"prepare.remove": '"mean"', "prepare.share_of": '"period"', "memory.limits": '"independent"',
             "memory.order": '"aicc"', "memory.confidence": "0.9",
             "trend.alpha": "0.01", "trend.per": '"decade"', "field.control": '"by"'}
KINDS = [[0.0], [0.3], [0.6], [0.9], [0.5, 0.3], [1.2, -0.5], [-0.4], [0.3, 0.2, 0.2], [0.2, 0, 0, 0.3, 0.25], [0.97]]


def autoregressive(rng, f, n):
    noise = rng.standard_normal(n + 400)
    x = np.zeros(n + 400)
    for t in range(len(x)):
        x[t] = noise[t] + sum(c * x[t - 1 - j] for j, c in enumerate(f) if t > j)
    return x[400:]


def holes(rng, cell):
    """Which steps of a cell are there; the kinds of gap take turns with the kinds of memory."""
    there = np.ones(STEPS, bool)
    kind = (cell // len(KINDS) + cell) % 6
    if kind == 1:
        there = rng.random(STEPS) > 0.08
    elif kind == 2:
        there = rng.random(STEPS) > 0.25
    elif kind == 3:
        there = np.arange(STEPS) % 12 >= 3  # frozen from January to March
    elif kind == 4:
        there[150:230] = False
    elif kind == 5:
        there[:190] = False
    return there


def make_cells():
    rng = np.random.default_rng(20260131)
    t = np.arange(STEPS)
    cells = np.full((ROWS * COLS, STEPS), np.nan)
    for cell in range(len(cells)):
        x = autoregressive(rng, KINDS[cell % len(KINDS)], STEPS)
        season = rng.uniform(0, 6) * np.cos(2 * np.pi * (t - rng.uniform(0, 12)) / 12)
        slope, level = rng.choice([0, 0, 0.03, -0.05]) / 12, rng.uniform(-5, 20)
        cells[cell] = np.where(holes(rng, cell), x + season + slope * t + level, np.nan)
    cells[3] = np.nan                                  # a lake
    cells[11] = np.where(np.isnan(cells[11]), np.nan, 4.5)  # constant
    cells[17, 25:] = np.nan                            # 25 values
    cells[22] = np.where(rng.random(STEPS) > 0.65, cells[22], np.nan)  # too many gaps
    cells[26, :-90] = np.nan                           # seven and a half years
    june = np.flatnonzero(t % 12 == 5)
    cells[30, june[1:]] = np.nan                       # a single June
    cells[31, june] = np.nan                           # no June at all
    cells[33] = np.where(t % 12 >= 6, cells[33], np.nan)  # half of every year: no pair at lag 6
    cells[:, ABSENT] = np.nan
    return cells


def write(path, cells):
    """The archive: shorts, north up, dates at mid-month, two missing values beside the fill."""
    present = np.setdiff1d(np.arange(STEPS), ABSENT)
    raw = np.where(np.isnan(cells), MISSING, np.rint((cells - OFFSET) / SCALE)).astype("i4")
    assert raw.min() >= -32768 and raw[raw != MISSING].min() > max(HOLES) and raw.max() < 32767
    rng = np.random.default_rng(7)
    for value in HOLES:  # some of what is missing is written in other ways
        raw = np.where((raw == MISSING) & (rng.random(raw.shape) < 0.3), value, raw)
    with netCDF4.Dataset(path, "w") as data:
        for name, size in (("time", None), ("lat", ROWS), ("lon", COLS)):
            data.createDimension(name, size)
        for name, units, values in (("lat", "degrees_north", 52 - 0.5 * np.arange(ROWS)),
                                    ("lon", "degrees_east", -4 + 0.5 * np.arange(COLS))):
            data.createVariable(name, "f8", name).setncatts({"units": units})
            data[name][:] = values
        days = [int((np.datetime64("1961-01", "M") + int(t)).astype("datetime64[D]").astype(int)) + 14.5 for t in present]
        data.createVariable("time", "f8", "time").setncatts({"units": "days since 1970-01-01", "calendar": "standard"})
        data["time"][:] = days
        warmth = data.createVariable("warmth", "i2", ("time", "lat", "lon"), fill_value=MISSING, zlib=True,
                                     chunksizes=(120, ROWS, COLS))
        warmth.setncatts({"scale_factor": SCALE, "add_offset": OFFSET, "missing_value": np.array(HOLES, "i2"),
                          "units": "degC"})
        warmth.set_auto_maskandscale(False)
        warmth[:] = raw[:, present].T.reshape(len(present), ROWS, COLS).astype("i2")


def read_raw(path):
    """The series as the file holds them, unpacked and laid on the full axis here."""
    with netCDF4.Dataset(path) as data:
        data.set_auto_maskandscale(False)
        raw = data["warmth"][:].reshape(-1, ROWS * COLS)
        days = data["time"][:]
    values = np.where(np.isin(raw, [MISSING, *HOLES]), np.nan, raw * SCALE + OFFSET)
    months = (np.array(days, "datetime64[D]").astype("datetime64[M]") - np.datetime64("1961-01", "M")).astype(int)
    full = np.full((ROWS * COLS, STEPS), np.nan)
    full[:, months] = values.T
    return full


def main(program):
    axis = oracle.Axis(seasons=np.arange(STEPS) % 12)
    times = [(np.datetime64("1961-01", "M") + t).astype("datetime64[D]").astype(int) + 14.5 for t in range(STEPS)]
    found = check.Comparison([f"row {cell // COLS}, col {cell % COLS}" for cell in range(ROWS * COLS)], scale=1.0)
    with tempfile.TemporaryDirectory() as name:
        folder = pathlib.Path(name)
        write(folder / "grid.nc", make_cells())
        cells = read_raw(folder / "grid.nc")
        check.run(program, folder, JOB)
        settings = oracle.Settings(min_share=0.45, max_lag=36)
        expected, _ = check.expected_maps(cells, axis, settings, times)
        found.all_maps(expected, check.read(folder / "maps.nc", check.maps_in(folder / "maps.nc")))
        units = check.read(folder / "maps.nc", ["mean", "trend_slope", "residual_sd", "decorrelation_time"])
        for variable, unit in (("mean", "degC"), ("trend_slope", "K year-1"), ("residual_sd", "K"),
                               ("decorrelation_time", "month")):
            if units[variable][1] != unit:
                found.problems.append(f"{variable}: unit '{units[variable][1]}', expected '{unit}'")

        changes = {**OTHERWISE, "output.file": f'"{folder / "other.nc"}"'}
        check.run(program, folder, JOB, *(part for key, value in changes.items() for part in ("--set", f"{key}={value}")))
        settings = oracle.Settings(min_share=0.45, max_lag=36, remove="mean", share_of="period", limits="independent",
                                   order="aicc", confidence=0.9, alpha=0.01)
        expected, _ = check.expected_maps(cells, axis, settings, times, control="by", rate_years=10)
        found.all_maps(expected, check.read(folder / "other.nc", check.maps_in(folder / "other.nc")))
    found.finish()


if __name__ == "__main__":
    main(sys.argv[1])
