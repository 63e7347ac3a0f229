"""usage: job_results.py LAGSCAPE CASE FOLDER. A whole job on an archive of each geometry, its result as GDAL sees it.

Archives: 15 years of monthly values, AR(1) noise with a season, one cell always missing; written with python3-netcdf4."""
import math
import os
import sys

import gdal_view as view
from gdal_view import netCDF4, numpy

STEPS = 180
WGS84 = ['"WGS 84"', '"EPSG",4326']
LAMBERT = {"grid_mapping_name": "lambert_conformal_conic", "standard_parallel": [25.0, 60.0],
           "latitude_of_projection_origin": 42.5, "longitude_of_central_meridian": -100.0, "false_easting": 0.0,
           "false_northing": 0.0, "semi_major_axis": 6378137.0, "inverse_flattening": 298.257223563}


def series(*shape):
    """AR(1) noise about a season, a series a cell; the last cell has no value at all."""
    random = numpy.random.default_rng(20)
    noise = random.standard_normal((STEPS, *shape))
    for t in range(1, STEPS):
        noise[t] += 0.6 * noise[t - 1]
    season = numpy.cos(2 * math.pi * numpy.arange(STEPS) / 12).reshape(STEPS, *[1] * len(shape))
    values = 280 + noise + 3 * season
    values.reshape(STEPS, -1)[:, -1] = numpy.nan
    return values.astype("f4")


def archive(folder, dims):
    """A new file with a monthly time axis; the variable `wetness` is added by the caller."""
    data = netCDF4.Dataset(os.path.join(folder, "archive.nc"), "w", format="NETCDF4_CLASSIC")
    data.Conventions = "CF-1.8"
    data.createDimension("time", STEPS)
    for name, size in dims.items():
        data.createDimension(name, size)
    time = data.createVariable("time", "f8", ("time",))
    time.setncatts({"standard_name": "time", "units": "days since 1981-01-01", "calendar": "360_day"})
    time[:] = numpy.arange(STEPS) * 30 + 15
    return data


def add(data, name, dims, values, **attributes):
    variable = data.createVariable(name, values.dtype, dims, fill_value=numpy.float32(1e20) if name == "wetness" else None)
    variable.setncatts(attributes)
    variable[:] = numpy.ma.masked_invalid(values) if name == "wetness" else values


def degrees(lat, lon, kind="f8"):
    def write(folder):
        data = archive(folder, {"lat": len(lat), "lon": len(lon)})
        add(data, "lat", ("lat",), numpy.array(lat, kind), standard_name="latitude", units="degrees_north", axis="Y")
        add(data, "lon", ("lon",), numpy.array(lon, kind), standard_name="longitude", units="degrees_east", axis="X")
        add(data, "wetness", ("time", "lat", "lon"), series(len(lat), len(lon)), long_name="soil wetness", units="K")
        data.close()
    return write


def lambert_km(folder):
    data = archive(folder, {"y": 5, "x": 7})
    add(data, "y", ("y",), -460.0 - 10 * numpy.arange(5), standard_name="projection_y_coordinate", units="km", axis="Y")
    add(data, "x", ("x",), 600.0 + 10 * numpy.arange(7), standard_name="projection_x_coordinate", units="km", axis="X")
    data.createVariable("lambert", "i4", ()).setncatts(LAMBERT)
    add(data, "wetness", ("time", "y", "x"), series(5, 7), units="K", grid_mapping="lambert")
    data.close()


ROW, COL = numpy.mgrid[0:12, 0:16]
CURVED_LAT, CURVED_LON = 40 + 0.2 * ROW + 0.02 * COL, 5 + 0.25 * COL - 0.03 * ROW


def curved(folder):
    data = archive(folder, {"nj": 12, "ni": 16})
    add(data, "lat", ("nj", "ni"), CURVED_LAT, standard_name="latitude", units="degrees_north")
    add(data, "lon", ("nj", "ni"), CURVED_LON, standard_name="longitude", units="degrees_east")
    add(data, "wetness", ("time", "nj", "ni"), series(12, 16), units="K", coordinates="lat lon")
    data.close()


def gauges(folder):
    names = ["Alder Weir", "Birch, Upper", "Cold Spring", "Dry Bridge"]
    data = archive(folder, {"station": 4, "letters": 12})
    data.featureType = "timeSeries"
    add(data, "lat", ("station",), numpy.array([51.5, 52.0, 52.5, 53.0]), standard_name="latitude", units="degrees_north")
    add(data, "lon", ("station",), numpy.array([-3.5, -3.0, -2.5, -2.0]), standard_name="longitude", units="degrees_east")
    identity = data.createVariable("name", "S1", ("station", "letters"))
    identity.cf_role = "timeseries_id"
    identity[:] = netCDF4.stringtochar(numpy.array(names, "S12"))
    add(data, "wetness", ("station", "time"), series(4).T, units="m3 s-1", coordinates="lat lon name")
    data.close()


def raster(origin, step, places, system=WGS84):
    return lambda path: view.check_raster(path, system, origin, step, places)


def warped(path):
    for name in ("decorrelation_time", "trend_slope"):
        view.check_warped(path, name, 0.05, [((CURVED_LON[c], CURVED_LAT[c]), c) for c in ((2, 3), (5, 8), (9, 12))])


GLOBE_LAT = list(numpy.arange(75.0, -90, -30))
# Case: archive, more lines of [input], check. Places: (x, y) and the (row, col) of the result; the last cell is missing.
CASES = {
    "north_up": (degrees([45, 35, 25, 15], [5, 15, 25, 35, 45, 55]), "",
                 raster((0, 50), (10, 10), [((5, 45), (0, 0)), ((35, 25), (2, 3)), ((55, 15), (3, 5))])),
    "south_up": (degrees([15, 25, 35, 45], [5, 15, 25, 35, 45, 55]), "",
                 raster((0, 50), (10, 10), [((5, 15), (0, 0)), ((35, 25), (1, 3)), ((55, 45), (3, 5))])),
    # A global grid is rolled to -180..180: what stood at 195 degrees east is found at -165.
    "lon_0_360": (degrees(GLOBE_LAT, numpy.arange(15.0, 360, 30)), "",
                  raster((-180, 90), (30, 30), [((-165, 75), (0, 0)), ((15, 45), (1, 6)), ((-15, -75), (5, 5))])),
    "lon_0_360_as_input": (degrees(GLOBE_LAT, numpy.arange(15.0, 360, 30)), 'longitude = "as-input"',
                           raster((0, 90), (30, 30), [((195, 75), (0, 6)), ((15, 45), (1, 0)), ((345, -75), (5, 11))])),
    "lon_180": (degrees(GLOBE_LAT, numpy.arange(-165.0, 180, 30)), "",
                raster((-180, 90), (30, 30), [((-165, 75), (0, 0)), ((15, 45), (1, 6)), ((165, -75), (5, 11))])),
    # At 0.01 degrees float32 coordinates are too coarse for GDAL: the result's must be as they were meant.
    "float32_axes": (degrees(50.005 + 0.01 * numpy.arange(4)[::-1], 170.005 + 0.01 * numpy.arange(6), "f4"), "",
                     raster((170, 50.04), (0.01, 0.01), [((170.005, 50.035), (0, 0)), ((170.034, 50.017), (2, 3))])),
    "projected_km": (lambert_km, "", raster((595, -455), (10, 10), [((600, -460), (0, 0)), ((631, -478), (2, 3))],
                                            ["Lambert", "6378137,298.257223563", 'LENGTHUNIT["kilometre",1000'])),
    "curvilinear": (curved, "", warped),
    "sites": (gauges, "", view.check_sites),
}

JOB = """title = "Memory of the invented Harrow Basin"
[input]
files = ["archive.nc"]
variable = "wetness"
{more}
[output]
file = "result.nc"
cubes = ["autocorrelation", "partial_autocorrelation"]
"""


def check_missing_cell(path):
    """The cell without values is missing in every map of estimates, and the others are not."""
    data = view.open_result(path)
    values = data.variables["decorrelation_time"][:].reshape(-1)
    gone = int(numpy.isnan(values).sum())
    assert gone == 1, f"{gone} of {values.size} cells have no decorrelation time; one was left without values"


if __name__ == "__main__":
    lagscape, case, folder = sys.argv[1:]
    write, more, check = CASES[case]
    os.makedirs(folder, exist_ok=True)
    write(folder)
    job = os.path.join(folder, "job.toml")
    with open(job, "w", encoding="utf-8") as file:
        file.write(JOB.format(more=more))
    view.run(lagscape, "run", job, "--replace", "--quiet")
    result = os.path.join(folder, "result.nc")
    check_missing_cell(result)
    check(result)
