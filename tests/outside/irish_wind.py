"""Twelve Irish stations, daily, as a wide CSV panel with a file of sites, against the oracle. usage: irish_wind.py PROGRAM

Wind speed 1961-1978 (Haslett and Raftery 1989, Applied Statistics 38, 1-50); see tests/reference/README.md.
"""
import csv
import datetime
import pathlib
import re
import sys
import tempfile

import numpy as np

import check
import oracle

MAX_LAG = 40
JOB = f"""
title = "Irish wind"
[input]
files = ["wind.csv"]
variable = "wind"
sites = "sites.csv"
[memory]
max_lag = {MAX_LAG}
[field]
control = "by"
[output]
file = "result.nc"
maps = ["all"]
cubes = ["autocorrelation", "autocorrelation_limit", "partial_autocorrelation", "autocovariance", "pair_count",
         "ar_coefficients"]
"""


def degrees(text):
    """51d56'N or 52d16'56.791"N as a number."""
    whole, minutes, seconds, side = re.fullmatch(r"(\d+)d(\d+)'(?:([\d.]+)\")?([NSEW])", text).groups()
    value = int(whole) + int(minutes) / 60 + float(seconds or 0) / 3600
    return -value if side in "SW" else value


def main(program):
    with open(check.REFERENCE / "irish_wind_daily_knots.csv") as file:
        rows = list(csv.DictReader(file))
    names = [name for name in rows[0] if name not in ("year", "month", "day")]
    dates = [datetime.date(1900 + int(row["year"]), int(row["month"]), int(row["day"])) for row in rows]
    with tempfile.TemporaryDirectory() as where:
        folder = pathlib.Path(where)
        with open(folder / "wind.csv", "w") as file:
            print("date", *names, sep=",", file=file)
            for date, row in zip(dates, rows):
                print(date.isoformat(), *(row[name] for name in names), sep=",", file=file)
        places = {}
        with open(check.REFERENCE / "irish_wind_stations.csv") as file, open(folder / "sites.csv", "w") as sites:
            print("name,lat,lon", file=sites)
            for row in csv.reader(file, quoting=csv.QUOTE_NONE):
                if row[0] != "Station":
                    places[row[1]] = (degrees(row[2]), degrees(row[3]))
                    print(row[1], *places[row[1]], sep=",", file=sites)
        check.run(program, folder, JOB)
        result = {**check.read(folder / "result.nc", check.maps_in(folder / "result.nc")),
                  **check.read(folder / "result_cubes.nc", check.maps_in(folder / "result_cubes.nc"))}

    days = [datetime.date(date.year, 12, 31).timetuple().tm_yday for date in dates]
    phases = [(date.timetuple().tm_yday - 1) / length for date, length in zip(dates, days)]
    axis = oracle.Axis(phases=phases, steps_per_year=365.2425)
    settings = oracle.Settings(max_lag=MAX_LAG)
    cells = [np.array([float(row[name]) for row in rows]) for name in names]
    times = [(date - datetime.date(1970, 1, 1)).days for date in dates]
    expected, _ = check.expected_maps(cells, axis, settings, times, control="by")
    found = check.Comparison(names, scale=5.0)
    found.all_maps(expected, result)
    found.finish()


if __name__ == "__main__":
    main(sys.argv[1])
