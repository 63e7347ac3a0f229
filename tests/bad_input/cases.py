"""What users get wrong. Each case prepares a folder, gives a job or a command line, and says what must come of it.

A case is a function that takes the folder and returns Expect(...); its name is the name of the test.
Exit codes: 2 command line, 3 job file, 4 input data, 5 output.
"""
from dataclasses import dataclass

import numpy as np

from files import COLS, MONTHS, ROWS, days, grid, map_only, panel_lines, spoil, values, write

JOB = """[input]
files = ["{files}"]
variable = "warmth"
{more}
[output]
file = "{result}"
"""


@dataclass
class Expect:
    code: int
    says: list            # regular expressions, each of which the message must match: place, what was found, remedy
    job: str = ""
    arguments: tuple = ("run", "job.toml")


def job(files="good.nc", more="", result="result.nc"):
    return JOB.format(files=files, more=more, result=result)


# --- files that are not what they seem --------------------------------------------------------------------------------

def truncated_classic_file(folder):
    """The netCDF library reads zeros where a classic file ends too early."""
    grid(folder / "good.nc", kind="NETCDF3_CLASSIC")
    whole = (folder / "good.nc").read_bytes()
    (folder / "good.nc").write_bytes(whole[: len(whole) // 2])
    return Expect(4, [r"cut short", r"where:.*good\.nc", r"fix:"], job())


def truncated_64bit_offset_file(folder):
    grid(folder / "good.nc", kind="NETCDF3_64BIT_OFFSET")
    whole = (folder / "good.nc").read_bytes()
    (folder / "good.nc").write_bytes(whole[: len(whole) - 300])
    return Expect(4, [r"cut short", r"where:.*good\.nc", r"fix:"], job())


def truncated_netcdf4_file(folder):
    grid(folder / "good.nc")
    whole = (folder / "good.nc").read_bytes()
    (folder / "good.nc").write_bytes(whole[: len(whole) // 2])
    return Expect(4, [r"where:.*good\.nc", r"fix:"], job())


def damaged_chunk(folder):
    """Bytes flipped inside compressed data: found while reading, after the run has begun."""
    grid(folder / "good.nc", data=values(1200), first=(1900, 1), chunks=(1200, ROWS, COLS))
    spoil(folder / "good.nc", 0.6, 400)
    return Expect(4, [r"where:.*good\.nc", r"warmth", r"fix:"], job())


def text_file_named_nc(folder):
    (folder / "good.nc").write_text("This is a note, not a grid.\n" * 20)
    return Expect(4, [r"not netCDF or HDF5", r"where:.*good\.nc", r"fix:.*\.csv"], job())


def empty_file(folder):
    (folder / "good.nc").write_bytes(b"")
    return Expect(4, [r"empty", r"where:.*good\.nc", r"fix:"], job())


def web_page_instead_of_csv(folder):
    """What a download gives when the login has expired."""
    (folder / "panel.csv").write_text("<!DOCTYPE html>\n<html><body>Please log in</body></html>\n")
    return Expect(4, [r"where:.*panel\.csv", r"fix:"], job("panel.csv"))


# --- variables, dimensions, grids ---------------------------------------------------------------------------------------

def missing_variable(folder):
    grid(folder / "good.nc", variable="warmht")
    return Expect(4, [r"no variable 'warmth'", r"did you mean 'warmht'", r"where:.*good\.nc", r"fix:"], job())


def variable_of_text(folder):
    import netCDF4
    grid(folder / "good.nc", variable="other")
    with netCDF4.Dataset(folder / "good.nc", "a") as file:
        file.createVariable("warmth", "S1", ("time", "lat", "lon"))
    return Expect(4, [r"text", r"where:.*good\.nc.*warmth", r"fix:"], job())


def no_time_axis(folder):
    map_only(folder / "good.nc")
    return Expect(4, [r"time", r"where:.*good\.nc", r"lat", r"fix:"], job())


def level_not_chosen(folder):
    grid(folder / "good.nc", levels=2)
    return Expect(4, [r"level", r"850", r"500", r"where:.*good\.nc", r"fix:.*select = \{ ?level = "], job())


def level_that_is_not_there(folder):
    grid(folder / "good.nc", levels=2)
    return Expect(4, [r"level = 700", r"850", r"where:.*good\.nc", r"fix:"], job(more="select = { level = 700 }"))


def files_of_different_grids(folder):
    grid(folder / "part_1.nc")
    grid(folder / "part_2.nc", first=(2005, 1), lat0=40.0)
    return Expect(4, [r"40 against 50", r"part_1\.nc", r"part_2\.nc", r"fix:"], job("part_*.nc"))


def files_of_different_calendars(folder):
    grid(folder / "part_1.nc")
    grid(folder / "part_2.nc", first=(2005, 1), calendar="360_day")
    return Expect(4, [r"calendar", r"part_1\.nc", r"part_2\.nc", r"fix:"], job("part_*.nc"))


def mask_of_another_grid(folder):
    grid(folder / "good.nc")
    map_only(folder / "land.nc", "land", rows=ROWS + 1)
    return Expect(4, [r"mask|land", r"land\.nc", rf"{ROWS + 1}", r"fix:"],
                  job(more='mask = { file = "land.nc", variable = "land", min = 0.5 }'))


def mask_without_its_variable(folder):
    grid(folder / "good.nc")
    map_only(folder / "land.nc", "land")
    return Expect(4, [r"no variable 'lnad'", r"did you mean 'land'", r"land\.nc", r"fix:"],
                  job(more='mask = { file = "land.nc", variable = "lnad", min = 0.5 }'))


def box_without_cells(folder):
    grid(folder / "good.nc")
    return Expect(4, [r"box", r"fix:"], job(more="box = [100.0, -40.0, 120.0, -30.0]"))


# --- time ---------------------------------------------------------------------------------------------------------------

def two_files_that_disagree(folder):
    """The same months twice, with other values."""
    grid(folder / "part_1.nc")
    grid(folder / "part_2.nc", data=values(MONTHS, seed=2), first=(2000, 1))
    return Expect(4, [r"different values|differ", r"part_1\.nc", r"part_2\.nc", r"fix:.*duplicates"], job("part_*.nc"))


def time_unit_without_since(folder):
    grid(folder / "good.nc", units="days")
    return Expect(4, [r"'days' has no reference date", r"where:.*good\.nc", r"fix:.*unit = "], job())


def time_without_unit(folder):
    grid(folder / "good.nc", units="")
    return Expect(4, [r"unit", r"where:.*good\.nc", r"fix:.*unit = "], job())


def thirteenth_month(folder):
    """A month 13 is taken for January by a widely used unit library."""
    grid(folder / "good.nc", units="days since 1970-13-01")
    return Expect(4, [r"1970-13-01", r"month", r"where:.*good\.nc", r"fix:"], job())


def unknown_calendar(folder):
    grid(folder / "good.nc", calendar="gregorain")
    return Expect(4, [r"calendar 'gregorain'", r"did you mean", r"where:.*good\.nc", r"fix:"], job())


def times_given_twice(folder):
    times = days((1990, 1), MONTHS)
    times[100] = times[99]
    grid(folder / "good.nc", times=times)
    return Expect(4, [r"twice|same|duplicate", r"1998-04-15", r"good\.nc", r"fix:"], job())


def times_at_random(folder):
    rng = np.random.default_rng(5)
    grid(folder / "good.nc", times=np.sort(rng.uniform(0, 9000, MONTHS)))
    return Expect(4, [r"equally spaced", r"good\.nc", r"fix:"], job())


def steps_that_begin_anew_each_year(folder):
    times = [day + 8 * i for day in (0, 365, 730, 1096) for i in range(46)][:MONTHS]
    grid(folder / "good.nc", times=np.array(times, float))
    return Expect(4, [r"commonest step is 8 days", r"begin anew each year", r"fix:.*months"], job())


def time_that_is_no_number(folder):
    times = np.array(days((1990, 1), MONTHS), float)
    times[17] = np.nan
    grid(folder / "good.nc", times=times)
    return Expect(4, [r"time value 18 of 180", r"good\.nc", r"fix:.*correct the time"], job())


def single_time_step(folder):
    grid(folder / "good.nc", data=values(1))
    return Expect(4, [r"single time step", r"good\.nc", r"fix:.*all files of the archive"], job())


def record_too_short_for_anything(folder):
    grid(folder / "good.nc", data=values(8))
    return Expect(4, [r"\b8\b", r"short|few|at least", r"fix:"], job())


def period_outside_the_record(folder):
    grid(folder / "good.nc")
    return Expect(4, [r"period", r"1990-01-15", r"2004-12-15", r"fix:"], job(more='period = ["1950-01-01", "1979-12-31"]'))


# --- CSV panels -----------------------------------------------------------------------------------------------------------

def empty_csv(folder):
    (folder / "panel.csv").write_text("")
    return Expect(4, [r"no header|no table|empty", r"where:.*panel\.csv", r"fix:"], job("panel.csv"))


def csv_without_rows(folder):
    write(folder / "panel.csv", panel_lines()[:1])
    return Expect(4, [r"panel\.csv", r"fix:"], job("panel.csv"))


def csv_with_letters(folder):
    lines = panel_lines()
    lines[20] = "1991-08-01,broken,0.5"
    write(folder / "panel.csv", lines)
    return Expect(4, [r"'broken'", r"panel\.csv:21", r"Alder", r"fix:"], job("panel.csv"))


def csv_with_decimal_commas(folder):
    write(folder / "panel.csv", [line.replace(",", ";").replace(".", ",") for line in panel_lines()])
    return Expect(4, [r"decimal comma", r"panel\.csv:2", r"fix:"], job("panel.csv"))


def csv_with_a_short_row(folder):
    lines = panel_lines()
    lines[7] = lines[7].rsplit(",", 1)[0]
    write(folder / "panel.csv", lines)
    return Expect(4, [r"2 cells.*3", r"panel\.csv:8", r"fix:"], job("panel.csv"))


def csv_with_a_bad_date(folder):
    lines = panel_lines()
    lines[3] = "1990-02-30,1.0,2.0"
    write(folder / "panel.csv", lines)
    return Expect(4, [r"1990-02-30", r"panel\.csv:4", r"fix:"], job("panel.csv"))


def sites_of_another_network(folder):
    write(folder / "panel.csv", panel_lines())
    write(folder / "sites.csv", ["name,lon,lat", "Cedar,1.0,50.0", "Elm,2.0,51.0"])
    return Expect(4, [r"Alder", r"Cedar", r"sites\.csv", r"fix:"], job("panel.csv", 'sites = "sites.csv"'))


def sites_with_swapped_coordinates(folder):
    write(folder / "panel.csv", panel_lines())
    write(folder / "sites.csv", ["name,lat,lon", "Alder,150.0,50.0", "Birch,151.0,51.0"])
    return Expect(4, [r"150", r"sites\.csv:2", r"fix:.*swapped"], job("panel.csv", 'sites = "sites.csv"'))


# --- jobs -----------------------------------------------------------------------------------------------------------------

def job_file_missing(folder):
    return Expect(3, [r"does not exist", r"none\.toml"], arguments=("run", "none.toml"))


def job_with_broken_toml(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"TOML", r"job\.toml:3:1", r"fix:"], "[input]\nfiles = [\"good.nc\"\nvariable = 1\n")


def input_file_missing(folder):
    return Expect(3, [r"job\.toml:2:\d+", r"nothing matches .*none_\*\.nc"], job("none_*.nc"))


def sites_file_missing(folder):
    write(folder / "panel.csv", panel_lines())
    return Expect(3, [r"job\.toml:4:\d+", r"no .*sites\.csv"], job("panel.csv", 'sites = "sites.csv"'))


def unknown_key(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:4:\d+", r"varaible", r"did you mean"], job(more='varaible = "warmth"'))


def unknown_table(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:\d+:\d+", r"memroy", r"did you mean"], job() + "[memroy]\nmax_lag = 12\n")


def wrong_type(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:8:\d+", r"min_share", r"number"], job() + '[prepare]\nmin_share = "most"\n')


def impossible_value(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:8:\d+", r"confidence", r"95", r"below 1"], job() + "[memory]\nconfidence = 95\n")


def unknown_choice(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:8:\d+", r"quadratic", r"did you mean"], job() + '[prepare]\nremove = "quadratc"\n')


def unknown_map(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:7:\d+", r"'trend_slpoe'", r"did you mean 'trend_slope'"], job() + 'maps = ["trend_slpoe"]\n')


def cube_among_the_maps(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:7:\d+", r"'autocorrelation' belongs in output\.cubes"], job() + 'maps = ["autocorrelation"]\n')


def unknown_trend_test(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:8:\d+", r"ols-nef", r"did you mean 'ols-neff'"], job() + '[trend]\ntests = ["ols-nef"]\n')


def many_problems_at_once(folder):
    """All are told in one go, in the order of the file."""
    grid(folder / "good.nc")
    return Expect(3, [r"5 problems", r"(?s)job\.toml:4:.*job\.toml:8:.*job\.toml:9:.*job\.toml:11:.*job\.toml:12:"],
                  job(more="box = [1, 2, 3]") + "[prepare]\nmin_share = 2\nremove = 3\n[field]\nrate = -1\nraet = 0.1\n")


def period_backwards(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:4:\d+", r"2000.*after 1995", r"earlier date first"],
                  job(more='period = ["2000-01-01", "1995-01-01"]'))


def box_upside_down(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:4:\d+", r"south 60", r"west, south, east, north"], job(more="box = [0, 60, 10, 40]"))


def lags_beyond_a_quarter_of_the_record(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"max_lag", r"100", rf"{MONTHS // 4}", r"fix:"],
                  job() + 'cubes = ["autocorrelation"]\n[memory]\nmax_lag = 100\n')


def running_mean_longer_than_the_record(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"window", r"fix:"], job() + '[prepare]\nremove = "running-mean"\nwindow = "P50Y"\n')


def several_variables_one_name(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:6:\d+", r"\{variable\}"],
                  '[input]\nfiles = ["good.nc"]\nvariable = ["warmth", "lat"]\n\n[output]\nfile = "result.nc"\n')


def result_over_its_input(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:6:\d+", r"over the input", r"another name"], job(result="good.nc"))


def set_with_a_bad_value(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"--set field\.rate", r"found 2", r"below 1"], job(), ("run", "job.toml", "--set", "field.rate=2"))


def set_with_an_unknown_key(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"--set feild\.rate", r"did you mean"], job(), ("run", "job.toml", "--set", "feild.rate=0.1"))


# --- output ---------------------------------------------------------------------------------------------------------------

def folder_that_cannot_be_made(folder):
    """Also for root, who may write anywhere: a file stands where the folder should be."""
    grid(folder / "good.nc")
    (folder / "notes").write_text("not a folder\n")
    return Expect(5, [r"notes", r"fix:.*output\.file"], job(result="notes/result.nc"))


def result_exists(folder):
    grid(folder / "good.nc")
    (folder / "result.nc").write_text("an earlier result\n")
    return Expect(5, [r"exists already", r"result\.nc", r"fix:.*--replace"], job())


def result_is_a_folder(folder):
    grid(folder / "good.nc")
    (folder / "result.nc").mkdir()
    return Expect(5, [r"folder", r"result\.nc", r"fix:"], job(), ("run", "job.toml", "--replace"))


# --- the command line -------------------------------------------------------------------------------------------------------

def no_command(folder):
    return Expect(2, [r"command is missing", r"run", r"--help"], arguments=())


def unknown_command(folder):
    return Expect(2, [r"unknown command 'rnu'", r"did you mean 'run'", r"--help"], arguments=("rnu", "job.toml"))


def unknown_option(folder):
    return Expect(2, [r"unknown option '--thread'", r"did you mean '--threads'", r"--help"], job(),
                  ("run", "job.toml", "--thread=2"))


def set_without_a_value(folder):
    grid(folder / "good.nc")
    return Expect(2, [r"--set", r"'field\.rate'", r"KEY=VALUE", r"fix:"], job(), ("run", "job.toml", "--set", "field.rate"))


def no_threads_at_all(folder):
    grid(folder / "good.nc")
    return Expect(2, [r"--threads", r"'0'", r"fix:"], job(), ("run", "job.toml", "--threads", "0"))


def memory_in_unknown_units(folder):
    grid(folder / "good.nc")
    return Expect(2, [r"--memory", r"'4 parsecs'", r"4GiB"], job(), ("run", "job.toml", "--memory", "4 parsecs"))


def word_to_explain_unknown(folder):
    return Expect(2, [r"decorelation_time", r"did you mean|decorrelation_time"], arguments=("explain", "decorelation_time"))


def survey_of_a_missing_file(folder):
    return Expect(4, [r"does not exist", r"none\.nc", r"fix:"], arguments=("survey", "none.nc"))


def survey_of_two_archives_at_once(folder):
    grid(folder / "good.nc")
    grid(folder / "other.nc", variable="rain")
    return Expect(4, [r"do not belong together", r"good\.nc has warmth", r"other\.nc has rain", r"fix:.*themselves"],
                  arguments=("survey", "good.nc", "other.nc"))


def survey_over_an_existing_job(folder):
    grid(folder / "good.nc")
    (folder / "mine.toml").write_text("# my own work\n")
    return Expect(5, [r"exists already", r"mine\.toml", r"--replace"],
                  arguments=("survey", "good.nc", "--write-job", "mine.toml"))


def plan_of_a_bad_job(folder):
    grid(folder / "good.nc")
    return Expect(3, [r"job\.toml:8:\d+", r"rate"], job() + "[field]\nrate = 7\n", ("plan", "job.toml"))


def recipe_with_an_unknown_key(folder):
    return Expect(3, [r"job\.toml:1:\d+", r"sede", r"did you mean 'seed'"], "sede = 1\n", ("forge", "job.toml"))


CASES = {name: value for name, value in globals().items() if callable(value) and getattr(value, "__module__", "") == __name__
         and name.islower() and name != "job"}
