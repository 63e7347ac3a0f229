"""Are the committed sample grids what the recipes make?  sample_grids_match.py COMMITTED MADE

Decoded values are compared, not bytes: other versions of the compression library or of the mathematical library may write
other bytes. A value may move by one unit of its last digit, in one value of ten thousand.
"""
import csv
import os
import sys

import netCDF4
import numpy as np

problems = []


def check(good, text):
    if not good:
        problems.append(text)


def compare(place, old, new, quantum):
    check(old.shape == new.shape, f"{place}: shape {new.shape}, committed {old.shape}")
    if old.shape != new.shape:
        return
    check(np.array_equal(np.isnan(old), np.isnan(new)), f"{place}: other values are missing")
    with np.errstate(invalid="ignore"):
        off = np.nan_to_num(np.abs(new - old))
        allowed = 1.001 * quantum + 2e-7 * np.nan_to_num(np.abs(old))
    check(np.all(off <= allowed), f"{place}: values differ by up to {off.max():g}")
    check(np.mean(off > 0.001 * quantum + 1e-12) <= 1e-4 or quantum == 0, f"{place}: too many values differ")


def decoded(variable):
    values = variable[:]
    if values.dtype.kind in "SU":
        return None
    return np.ma.filled(values.astype(float), np.nan)


def compare_netcdf(name, old_path, new_path):
    with netCDF4.Dataset(old_path) as old, netCDF4.Dataset(new_path) as new:
        names, again = list(old.variables), list(new.variables)
        check(names == again, f"{name}: variables {again}, committed {names}")
        for key, variable in old.variables.items():
            again = new.variables.get(key)
            if again is None:
                continue
            check(variable.dtype == again.dtype, f"{name}, {key}: type {again.dtype}, committed {variable.dtype}")
            mine, its = decoded(variable), decoded(again)
            if mine is None:
                check(np.array_equal(variable[:], again[:]), f"{name}, {key}: other texts")
            else:
                compare(f"{name}, {key}", mine, its, getattr(variable, "scale_factor", 0.0))
            for attribute in variable.ncattrs():
                if attribute != "_FillValue":
                    same = np.array_equal(variable.getncattr(attribute), getattr(again, attribute, None))
                    check(same, f"{name}, {key}: attribute {attribute} differs")


def read_csv(path):
    with open(path, newline="") as file:
        return list(csv.reader(file))


def compare_csv(name, old_path, new_path):
    old, new = read_csv(old_path), read_csv(new_path)
    check([row[0] for row in old] == [row[0] for row in new], f"{name}: other dates or names")
    check(old[:2] == new[:2], f"{name}: another header")
    if name.endswith("_sites.csv"):
        return check(old == new, f"{name}: other sites")
    body = [np.array([[float(field) if field else np.nan for field in row[1:]] for row in rows[2:]]) for rows in (old, new)]
    compare(name, *body, 0.001)


committed, made = sys.argv[1:3]
names = sorted(name for name in os.listdir(committed) if not name.endswith(".md"))
check(names == sorted(os.listdir(made)), f"files made: {sorted(os.listdir(made))}, committed: {names}")
for name in names:
    paths = os.path.join(committed, name), os.path.join(made, name)
    if os.path.exists(paths[1]):
        (compare_csv if name.endswith(".csv") else compare_netcdf)(name, *paths)
size = sum(os.path.getsize(os.path.join(committed, name)) for name in names)
check(size <= 6e6, f"sample grids take {size} bytes, more than 6 MB")
print("\n".join(problems) or f"{len(names)} files, {size} bytes: all as the recipes make them")
sys.exit(1 if problems else 0)
