"""What GDAL's command-line tools say of a result, compared with what the netCDF library reads from the same file.

The tools are the outside judge: gdalinfo and ogrinfo for reference system, place, missing value and names, gdallocationinfo,
gdalwarp and ogr2ogr for values. Each check raises AssertionError with the words of the difference."""
import csv
import json
import math
import os
import shutil
import subprocess
import sys

TOOLS = ["gdalinfo", "gdallocationinfo", "gdalwarp", "ogrinfo", "ogr2ogr"]
missing = [tool for tool in TOOLS if shutil.which(tool) is None]
try:
    import netCDF4
    import numpy
except ImportError as error:
    missing.append(f"python3-netcdf4 ({error})")
if missing:
    sys.exit(f"cannot check: {', '.join(missing)} missing; install gdal-bin and python3-netcdf4 (jobs/setup_debian.sh)")

NODATA = {"f4": math.nan, "f8": math.nan, "i4": -1, "i2": -1, "i1": 127}


def run(*command, text=None):
    """Standard output of a command that must succeed; text: its standard input."""
    done = subprocess.run(command, capture_output=True, text=True, input=text)
    assert done.returncode == 0, f"{' '.join(command)} gave {done.returncode}: {done.stdout}{done.stderr}"
    return done.stdout


def same(one, other, tolerance=1e-6):
    if math.isnan(one) or math.isnan(other):
        return math.isnan(one) and math.isnan(other)
    return abs(one - other) <= tolerance * max(1.0, abs(other))


def open_result(path):
    data = netCDF4.Dataset(path)
    data.set_auto_mask(False)
    return data


def maps_of(data):
    """Names of the maps and cubes: whatever has a fill value."""
    return [name for name, variable in data.variables.items() if "_FillValue" in variable.ncattrs()]


def source(path, name):
    return f'NETCDF:"{path}":{name}'


def describe(path, name):
    return json.loads(run("gdalinfo", "-json", source(path, name)))


def check_names(path, data):
    """Every map stands in the list that a GIS offers, under its own name."""
    offered = json.loads(run("gdalinfo", "-json", path))["metadata"]["SUBDATASETS"]
    listed = {value.rsplit(":", 1)[1] for key, value in offered.items() if key.endswith("_NAME")}
    absent = set(maps_of(data)) - listed
    assert not absent, f"GDAL does not list {sorted(absent)}"


def check_bands(data, name, info):
    """Missing value, number of bands, and the lag or order of each band of a cube."""
    variable = data.variables[name]
    layers = variable.shape[0] if variable.ndim == 3 else 1
    assert len(info["bands"]) == layers, f"{name}: {len(info['bands'])} bands for {layers} layers"
    wanted = NODATA[variable.dtype.str[1:]]
    for layer, band in enumerate(info["bands"]):
        nodata = float(band["noDataValue"])
        assert same(nodata, wanted), f"{name}: nodata {nodata}, not {wanted}"
        if variable.ndim < 3:
            continue
        axis = variable.dimensions[0]
        found = float(band["metadata"][""][f"NETCDF_DIM_{axis}"])
        assert same(found, float(data.variables[axis][layer])), f"{name}: band {layer + 1} has {axis} {found}"


def check_system(name, info, wanted):
    wkt = info.get("coordinateSystem", {}).get("wkt", "")
    for part in wanted:
        assert part in wkt, f"{name}: no {part} in the reference system: {wkt or 'none'}"


def check_raster(path, system, origin, step, places):
    """A grid with a cell size. origin: west and north end; step: cell size in x and y; places: (x, y) and (row, col)."""
    data = open_result(path)
    check_names(path, data)
    for name in maps_of(data):
        info = describe(path, name)
        transform = info.get("geoTransform")
        assert transform, f"{name}: GDAL finds no place"
        wanted = [origin[0], step[0], 0.0, origin[1], 0.0, -step[1]]
        assert all(same(a, b, 1e-9) for a, b in zip(transform, wanted)), f"{name}: {transform}, not {wanted}"
        check_system(name, info, system)
        check_bands(data, name, info)
        check_values(path, data, name, places)


def check_values(path, data, name, places):
    """gdallocationinfo at each place gives the values of the cell there, in every layer."""
    points = "".join(f"{x} {y}\n" for (x, y), _ in places)
    found = [float(v) for v in run("gdallocationinfo", "-valonly", "-geoloc", source(path, name), text=points).split()]
    wanted = [(place, cell, layer, float(value)) for place, cell in places
              for layer, value in enumerate(numpy.atleast_1d(data.variables[name][..., cell[0], cell[1]]))]
    assert len(found) == len(wanted), f"{name}: {len(found)} values for {len(wanted)}"
    for value, (place, cell, layer, expected) in zip(found, wanted):
        where = f"{name} at {place}, layer {layer}"
        assert same(value, expected), f"{where}: GDAL gives {value}, the cell at row, col {cell} has {expected}"


def check_warped(path, name, degrees, cells):
    """A grid whose cells have places of their own: GDAL carries values to the right longitude and latitude, on a raster of so
    many degrees a cell (well finer than the grid's own cells, for GDAL takes the nearest)."""
    data = open_result(path)
    check_names(path, data)
    info = describe(path, name)
    assert info["metadata"].get("GEOLOCATION"), f"{name}: GDAL finds no place of cells"
    check_system(name, info, ['"EPSG",4326'])
    check_bands(data, name, info)
    warped = os.path.join(os.path.dirname(path), "warped.tif")
    run("gdalwarp", "-q", "-overwrite", "-t_srs", "EPSG:4326", "-tr", str(degrees), str(degrees), source(path, name), warped)
    for (lon, lat), (row, col) in cells:
        found = float(run("gdallocationinfo", "-valonly", "-wgs84", warped, str(lon), str(lat)))
        wanted = float(data.variables[name][row, col])
        assert not math.isnan(wanted), f"{name}: row {row}, col {col} is missing, choose another cell"
        assert same(found, wanted), f"{name} at {lon} {lat}: GDAL gives {found}, row {row}, col {col} has {wanted}"


def check_nowhere(path):
    """A grid without coordinates: values and nothing more."""
    data = open_result(path)
    check_names(path, data)
    for name in maps_of(data):
        info = describe(path, name)
        assert not info.get("coordinateSystem", {}).get("wkt") and "geoTransform" not in info, f"{name}: a place from nowhere"
        check_bands(data, name, info)
    first = maps_of(data)[0]
    assert float(run("gdallocationinfo", "-valonly", source(path, first), "1", "0")) == float(data.variables[first][0, 1])


def check_sites(path):
    """A panel of sites: points with a field for each map, and the same numbers in the table beside."""
    data = open_result(path)
    layer = os.path.splitext(os.path.basename(path))[0]
    about = run("ogrinfo", "-so", "-al", path)
    for part in (f"Layer name: {layer}", "Geometry: ", "Point", 'ID["EPSG",4326]'):
        assert part in about, f"no {part} in what ogrinfo says: {about}"
    features = json.loads(run("ogr2ogr", "-f", "GeoJSON", "/vsistdout/", path))["features"]
    names = netCDF4.chartostring(data.variables["station_id"][:])
    assert len(features) == len(names), f"{len(features)} points for {len(names)} sites"
    maps = maps_of(data)
    for site, feature in enumerate(features):
        assert feature["properties"]["station_id"] == str(names[site]).rstrip("\0 ")
        place = feature["geometry"]["coordinates"][:2]
        wanted = [float(data["lon"][site]), float(data["lat"][site])]
        assert same(place[0], wanted[0]) and same(place[1], wanted[1]), f"site {site} at {place}, not {wanted}"
        for name in maps:
            wanted, fill = float(data.variables[name][site]), float(data.variables[name].getncattr("_FillValue"))
            found = feature["properties"].get(name)  # GDAL leaves out what is missing
            gone = math.isnan(wanted) or wanted == fill
            assert (found is None) if gone else same(float(found), wanted), f"{name} of site {site}: {found}, not {wanted}"
    check_table(os.path.splitext(path)[0] + ".csv", data, names, maps)
    cubes = os.path.splitext(path)[0] + "_cubes.nc"
    assert open_result(cubes).variables["autocorrelation"].dimensions == ("station", "lag"), "the cube stands (station, lag)"


def check_table(path, data, names, maps):
    """The table gives points too, and the same values to the last digit."""
    table = run("ogrinfo", "-q", "-al", "-oo", "X_POSSIBLE_NAMES=lon", "-oo", "Y_POSSIBLE_NAMES=lat", path)
    assert "POINT (" in table, f"the table gives no points: {table}"
    with open(path, newline="", encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    assert [row["station_id"] for row in rows] == [str(name).rstrip("\0 ") for name in names]
    for site, row in enumerate(rows):
        for name in maps:
            variable = data.variables[name]
            if " since " in getattr(variable, "units", ""):
                continue  # dates in the table
            wanted, fill = float(variable[site]), float(variable.getncattr("_FillValue"))
            gone = math.isnan(wanted) or wanted == fill
            right = row[name] == "" if gone else variable.dtype.type(row[name]) == variable[site]
            assert right, f"{name} of {row['station_id']}: {row[name]}, not {wanted}"
