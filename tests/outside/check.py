"""Runs the program on a job and compares every cell of every map and cube of the result with the oracle."""
import pathlib
import subprocess
import sys

import netCDF4
import numpy as np

import oracle

REFERENCE = pathlib.Path(__file__).resolve().parents[1] / "reference"

# name -> (relative, absolute in units of the scale given below). Results are float32: half a unit in the last place is
# 6e-8. More room for what goes through numeric derivatives (limits of tau) or far tails (p-values), and for sums that the
# program ends where the model's autocorrelation falls below 1e-6 (effective sizes, and through them the limits of the mean).
FLOAT32 = (2e-7, 1e-9)
LOOSER = {"effective_sample_size": (3e-6, 0), "effective_sample_size_for_variance": (3e-6, 0),
          "mean_low": (2e-7, 1e-6), "mean_high": (2e-7, 1e-6), "decorrelation_time_low": (2e-6, 1e-9),
          "decorrelation_time_high": (2e-6, 1e-9), "trend_p": (1e-6, 1e-12),
          "trend_p_ols": (1e-6, 1e-12), "trend_p_ols_neff": (1e-6, 1e-12),
          "trend_p_independent": (1e-6, 1e-12), "trend_p_field": (1e-6, 1e-12), "ljung_box_p": (1e-6, 1e-12)}
EXACT = {"status", "valid_count", "pair_count", "ar_order", "trend_class", "first_time", "last_time"}
IN_UNITS = {"mean", "mean_low", "mean_high", "residual_sd", "innovation_sd", "trend_slope", "trend_slope_low", "trend_slope_high",
            "trend_total", "detectable_trend", "autocovariance"}
# Times that the oracle gives in steps.
IN_STEPS = {"longest_gap", "decorrelation_time", "decorrelation_time_low", "decorrelation_time_high", "efolding_time",
            "zero_crossing_time", "integral_time", "geyer_time", "sokal_time", "ar1_time", "first_lag_within_limits"}
CUBES = {"autocorrelation", "autocorrelation_limit", "partial_autocorrelation", "autocovariance", "pair_count", "ar_coefficients"}
EVERY_MAP = IN_UNITS | IN_STEPS | CUBES | EXACT | set(LOOSER) | {
    "valid_share", "variance_share_season", "variance_share_trend", "lag1_autocorrelation", "lag1_autocorrelation_corrected",
    "effective_sample_size", "effective_sample_size_for_variance", "effective_sample_size_for_trend"}


def expected_maps(cells, axis, settings, times, rate=0.10, control="bh", rate_years=1):
    """Map name -> array over cells (cubes: layers first). cells: list of series; times: days since 1970 of each step."""
    found = [oracle.analyse(x, axis, settings) for x in cells]
    steps_per_rate = axis.steps_per_year * rate_years

    def one(name, factor=1.0):
        return np.array([cell.get(name, np.nan) for cell in found], float) * factor

    maps = {name: one(name) for name in EVERY_MAP - CUBES}
    for name in CUBES:
        layers = settings.max_order if name == "ar_coefficients" else settings.max_lag + 1
        maps[name] = np.array([cell.get(name, np.full(layers, np.nan)) for cell in found]).T
    for map_name, key in (("trend_slope", "slope"), ("trend_slope_low", "slope_low"), ("trend_slope_high", "slope_high"),
                          ("detectable_trend", "detectable")):
        maps[map_name] = one(key, steps_per_rate)
    for map_name, key in (("first_time", "first"), ("last_time", "last")):
        maps[map_name] = np.array([times[cell[key]] if cell["valid_count"] else np.nan for cell in found])
    maps["trend_p_ols_neff"], maps["trend_p_ols"] = maps["trend_p"], maps["trend_p_independent"]
    p = maps["trend_p"]
    maps["trend_p_field"] = oracle.adjusted(p, control)
    stands = (p <= settings.alpha) & (maps["trend_p_field"] <= rate)
    maps["trend_class"] = np.where(np.isnan(p), np.nan, np.where(stands, np.where(maps["trend_slope"] > 0, 1, 2), 0))
    return maps, found


def run(program, folder, job, *options):
    """Writes and runs a job; ends the test if the program does not succeed."""
    path = folder / "job.toml"
    path.write_text(job)
    answer = subprocess.run([program, "run", str(path), *options], capture_output=True, text=True)
    if answer.returncode != 0:
        sys.exit(f"the program ended with {answer.returncode}:\n{answer.stdout}{answer.stderr}")
    return answer.stdout


def read(path, names):
    """Map name -> (values as float64 with NaN for missing, units). Cells are flattened, layers stay first."""
    out = {}
    with netCDF4.Dataset(path) as data:
        data.set_auto_mask(True)
        for name in names:
            if name in data.variables:
                variable = data[name]
                values = np.ma.filled(np.ma.masked_invalid(np.ma.array(variable[:], dtype=float)), np.nan)
                if variable.dimensions[0] == "station":  # cubes of sites: (station, lag)
                    values = np.moveaxis(values, 0, -1)[..., np.newaxis]
                layers = values.shape[:-2]
                out[name] = (values.reshape(*layers, -1), getattr(variable, "units", ""))
    return out


class Comparison:
    """Collects what differs; every difference is told with its cell."""

    def __init__(self, labels, scale):
        self.labels, self.scale, self.problems, self.values = labels, scale, [], 0

    def compare(self, name, expected, actual):
        relative, absolute = LOOSER.get(name, FLOAT32)
        if name in IN_UNITS:
            absolute *= self.scale**2 if name == "autocovariance" else self.scale
        if name in EXACT:
            relative = absolute = 0
        if expected.shape != actual.shape:
            self.problems.append(f"{name}: shape {actual.shape}, expected {expected.shape}")
            return
        self.values += expected.size
        missing = np.isnan(expected) != np.isnan(actual)
        away = np.abs(expected - actual) > absolute + relative * np.abs(expected)
        wrong = np.argwhere(missing | away)
        for index in wrong[:4]:
            where = tuple(index)
            layer = f", layer {where[0]}" if len(where) > 1 else ""
            self.problems.append(f"{name}, {self.labels[where[-1]]}{layer}: {actual[where]!r}, expected {expected[where]!r}")
        if len(wrong) > 4:
            self.problems.append(f"{name}: {len(wrong)} of {expected.size} values differ")

    def all_maps(self, expected, actual, not_checked=()):
        """Every map of the oracle is in the result, and the result has none that nobody looked at."""
        for name in sorted(EVERY_MAP):
            if name not in actual:
                self.problems.append(f"{name}: not in the result")
            else:
                self.compare(name, expected[name], actual[name][0])
        for name in set(actual) - EVERY_MAP - set(not_checked):
            self.problems.append(f"{name}: in the result, but the oracle does not know it")

    def finish(self):
        for problem in self.problems:
            print(problem)
        print(f"{self.values} values compared, {len(self.problems)} problems")
        if self.problems or self.values == 0:
            sys.exit(1)


def maps_in(path):
    """Names of the variables that hold maps or cubes: all that have a fill value, but for coordinates."""
    with netCDF4.Dataset(path) as data:
        return [name for name, variable in data.variables.items()
                if hasattr(variable, "_FillValue") and name not in ("lat", "lon", "altitude")]
