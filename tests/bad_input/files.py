"""Small files to spoil: a sound monthly grid, its parts, and a sound CSV panel."""
import datetime

import netCDF4
import numpy as np

ROWS, COLS, MONTHS = 3, 4, 180


def values(steps, seed=1):
    rng = np.random.default_rng(seed)
    return (10 + rng.standard_normal((steps, ROWS, COLS))).astype("f4")


def days(first, steps):
    """Mid-month dates as days since 1970, from a month such as (1990, 1)."""
    months = first[0] * 12 + first[1] - 1 + np.arange(steps)
    return [(datetime.date(m // 12, m % 12 + 1, 15) - datetime.date(1970, 1, 1)).days for m in months]


def grid(path, data=None, times=None, units="days since 1970-01-01", calendar="standard", first=(1990, 1), lat0=50.0, levels=0,
         variable="warmth", kind="NETCDF4", chunks=None):
    """Writes a grid; every argument is one thing to do differently. levels: length of a further dimension."""
    data = values(MONTHS) if data is None else data
    steps = len(data)
    with netCDF4.Dataset(path, "w", format=kind) as file:
        sizes = {"time": steps, "lat": ROWS, "lon": COLS}
        if levels:
            sizes = {"time": steps, "level": levels, "lat": ROWS, "lon": COLS}
            file.createDimension("level", levels)
            file.createVariable("level", "f8", "level").units = "hPa"
            file["level"][:] = 850.0 - 350.0 * np.arange(levels)
        for name, units_of, axis in (("lat", "degrees_north", lat0 - np.arange(ROWS)),
                                     ("lon", "degrees_east", 5.0 + np.arange(COLS))):
            file.createDimension(name, sizes[name])
            file.createVariable(name, "f8", name).units = units_of
            file[name][:] = axis
        file.createDimension("time", None if kind != "NETCDF4" else steps)
        time = file.createVariable("time", "f8", "time")
        if units:
            time.units = units
        time.calendar = calendar
        time[:] = days(first, steps) if times is None else times
        field = file.createVariable(variable, "f4", tuple(sizes), zlib=chunks is not None, chunksizes=chunks)
        field.units = "K"
        field[:] = np.repeat(data[:, np.newaxis], levels, axis=1) if levels else data


def map_only(path, name="warmth", rows=ROWS, cols=COLS):
    """A single map without a time axis."""
    with netCDF4.Dataset(path, "w") as file:
        for dimension, size, unit in (("lat", rows, "degrees_north"), ("lon", cols, "degrees_east")):
            file.createDimension(dimension, size)
            file.createVariable(dimension, "f8", dimension).units = unit
            file[dimension][:] = 50.0 - np.arange(size) if dimension == "lat" else 5.0 + np.arange(size)
        file.createVariable(name, "f4", ("lat", "lon"))[:] = 1.0


def panel_lines(rows=60):
    """Header and rows of a sound panel of two sites."""
    rng = np.random.default_rng(3)
    months = [1990 * 12 + i for i in range(rows)]
    pairs = zip(months, rng.standard_normal((rows, 2)))
    return ["date,Alder,Birch"] + [f"{m // 12}-{m % 12 + 1:02d}-01,{a:.2f},{b:.2f}" for m, (a, b) in pairs]


def write(path, lines):
    path.write_text("\n".join(lines) + "\n")


def spoil(path, at, count):
    """Overwrites bytes in the middle of a file."""
    data = bytearray(path.read_bytes())
    begin = int(at * len(data))
    data[begin : begin + count] = b"\x55" * count
    path.write_bytes(data)
