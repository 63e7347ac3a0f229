"""usage: writer_results.py MAKE_RESULT CASE FOLDER. Files of the result writer, one of each geometry, as GDAL sees them."""
import os
import sys

import gdal_view as view

WGS84 = ['"WGS 84"', '"EPSG",4326']
LAMBERT = ["Lambert", "6378137,298.257223563"]


def even(origin, step, shape, places, system=WGS84):
    """A raster; the last cell is always looked up too: it is missing."""
    rows, cols = shape
    last = ((origin[0] + (cols - 0.5) * step[0], origin[1] - (rows - 0.5) * step[1]), (rows - 1, cols - 1))
    return lambda path: view.check_raster(path, system, origin, step, [*places, last])


def south_up(path):
    """GDAL turns rows round by itself: row 0 is the southernmost, at the bottom of its picture."""
    view.check_raster(path, WGS84, (0, 50), (10, 10), [((5, 15), (0, 0)), ((35, 25), (1, 3)), ((55, 45), (3, 5))])


def curvilinear(path):
    cells = [(3, 5), (10, 20), (25, 35)]
    view.check_warped(path, "decorrelation_time", 0.05,
                      [((5 + 0.25 * c - 0.03 * r, 40 + 0.2 * r + 0.02 * c), (r, c)) for r, c in cells])


def uneven_lat(path):
    view.check_warped(path, "decorrelation_time", 1,
                      [((35, 60), (0, 3)), ((35, 42), (2, 3)), ((35, 27), (5, 3)), ((15, 31), (4, 1))])


CASES = {
    "north_up": even((0, 50), (10, 10), (4, 6), [((5, 45), (0, 0)), ((15, 35), (1, 1)), ((31, 28), (2, 3))]),
    "south_up": south_up,
    "lon_0_360": even((0, 90), (30, 30), (6, 12), [((195, 75), (0, 6)), ((15, -15), (3, 0))]),
    "lon_180": even((-180, 90), (30, 30), (6, 12), [((-165, 75), (0, 0)), ((15, -15), (3, 6))]),
    "across_180": even((160, 50), (10, 10), (4, 4), [((175, 45), (0, 1)), ((185, 35), (1, 2))]),
    "tenths": even((-10, 60), (0.1, 0.1), (20, 30), [((-9.95, 59.95), (0, 0)), ((-8.03, 58.97), (10, 19))]),
    "uneven_lat": uneven_lat,
    "projected_km": even((595, -455), (10, 10), (5, 7), [((600, -460), (0, 0)), ((631, -478), (2, 3))],
                         LAMBERT + ['LENGTHUNIT["kilometre",1000']),
    "projected_m": even((595000, -455000), (10000, 10000), (5, 7), [((631000, -478000), (2, 3))],
                        LAMBERT + ['LENGTHUNIT["metre",1']),
    # South-up, hence turned by GDAL: the northern end is the last row.
    "rotated_pole": lambda path: view.check_raster(path, ["Rotated_pole", "6371229"], (-3.5, 2.5), (1, 1),
                                                   [((-3, -2), (0, 0)), ((2, 1), (3, 5))]),
    "curvilinear": curvilinear,
    "index": view.check_nowhere,
    "sites": view.check_sites,
}

if __name__ == "__main__":
    make_result, case, folder = sys.argv[1:]
    os.makedirs(folder, exist_ok=True)
    result = os.path.join(folder, "result.nc")
    view.run(make_result, case, result)
    CASES[case](result)
