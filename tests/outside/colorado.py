"""Six stations in Colorado, monthly, one with long gaps, as a CSV panel without coordinates. usage: colorado.py PROGRAM

Monthly means of the daily minimum temperature, 1895-1997; see tests/reference/README.md.
"""
import csv
import datetime
import pathlib
import sys
import tempfile

import numpy as np

import check
import oracle

MAX_LAG = 30
JOB = f"""
title = "Colorado, minimum temperature"
[input]
files = ["tmin_*.csv"]
variable = "tmin"
[prepare]
min_share = 0.5
[memory]
max_lag = {MAX_LAG}
[output]
file = "result.nc"
maps = ["all"]
cubes = ["autocorrelation", "autocorrelation_limit", "partial_autocorrelation", "autocovariance", "pair_count",
         "ar_coefficients"]
"""


def main(program):
    tables = []
    for name in ("colorado_tmin_monthly_5st.csv", "colorado_tmin_monthly_gappy.csv"):
        with open(check.REFERENCE / name) as file:
            tables.append(list(csv.DictReader(file)))
    rows = [{**complete, **gappy} for complete, gappy in zip(*tables)]
    names = [name for name in rows[0] if name not in ("year", "month")]
    with tempfile.TemporaryDirectory() as where:
        folder = pathlib.Path(where)
        for part, (begin, end) in enumerate(((600, len(rows)), (0, 600))):  # two files, the later years first
            with open(folder / f"tmin_{part}.csv", "w") as file:
                print("date", *names, sep=",", file=file)
                for row in rows[begin:end]:
                    values = ("" if row[name] == "NA" else row[name] for name in names)
                    print(f"{int(row['year']):04d}-{int(row['month']):02d}-01", *values, sep=",", file=file)
        check.run(program, folder, JOB)
        result = {**check.read(folder / "result.nc", check.maps_in(folder / "result.nc")),
                  **check.read(folder / "result_cubes.nc", check.maps_in(folder / "result_cubes.nc"))}

    axis = oracle.Axis(seasons=[int(row["month"]) - 1 for row in rows])
    settings = oracle.Settings(max_lag=MAX_LAG, min_share=0.5)
    cells = [np.array([np.nan if row[name] == "NA" else float(row[name]) for row in rows]) for name in names]
    times = [(datetime.date(int(row["year"]), int(row["month"]), 1) - datetime.date(1970, 1, 1)).days for row in rows]
    expected, _ = check.expected_maps(cells, axis, settings, times)
    found = check.Comparison(names, scale=5.0)
    found.all_maps(expected, result)
    found.finish()


if __name__ == "__main__":
    main(sys.argv[1])
