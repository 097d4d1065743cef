"""Every reader of weather files against pvlib's raw read of the same file, and against other formats of the same year."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner
from pvlib import iotools

from collector.cli import main
from tests.measured.archive import data_file
from tests.weather_samples import epw_rows, epw_text
from tests.weather_tables import SOUTH, frame_of, mapping, place_of, southern_frame, table_text
from weather.errors import InputError
from weather.files import read
from weather.formats.known import ALLOWED, FORMATS
from weather.formats.raw import dew_point
from weather.plane import on_plane
from weather.sky import magnus_vapour_pressure
from weather.stations import STATIONS, open_weather
from weather.sun import sun_position

PVGIS = "tmy_45.000_8.000_2005_2023"
COLORADO = {"latitude_deg": 40.53, "longitude_deg": -108.54, "altitude_m": 2168.0, "utc_offset_h": -7.0}
RADIATION = ("ghi", "dni", "dhi")


@pytest.fixture
def table(tmp_path):
    """What a table in CSV comes to."""

    def of(text, *, place=SOUTH, **columns):
        path = tmp_path / "made.csv"
        path.write_text(text, encoding="utf-8")
        return read(path, place=place, columns=mapping(**columns))

    return of


@pytest.fixture
def told(table, tmp_path):
    def tell(text, **more):
        with pytest.raises(InputError) as caught:
            table(text, **more)
        return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]

    return tell


# --- the European typical year


@pytest.mark.parametrize("kind", ["csv", "json"])
def test_european_year_as_pvlib_reads_it(kind):
    path = data_file(f"{PVGIS}.{kind}")
    weather, (frame, _) = read(path), iotools.read_pvgis_tmy(str(path))
    for name in RADIATION:
        assert getattr(weather, name).tolist() == frame[name].tolist(), name
    assert weather.t_air == pytest.approx(frame["temp_air"].to_numpy() + 273.15, abs=1e-9)
    assert weather.wind.tolist() == frame["wind_speed"].tolist()
    assert weather.longwave.tolist() == frame["IR(h)"].tolist()
    assert weather.pressure == pytest.approx(frame["pressure"].mean())
    humidity = magnus_vapour_pressure(weather.t_dew) / magnus_vapour_pressure(weather.t_air)
    assert 100.0 * humidity == pytest.approx(frame["relative_humidity"].clip(upper=100.0).to_numpy(), abs=1e-6)
    assert (weather.site.latitude_deg, weather.site.longitude_deg, weather.site.altitude_m) == (45.0, 8.0, 250.0)


def test_european_year_stands_where_its_header_says():
    weather = read(data_file(f"{PVGIS}.csv"))
    assert weather.stamp.rule_min == weather.stamp.used_min == pytest.approx(60.0 * 0.1761, abs=0.01)
    assert weather.stamp.found_min == pytest.approx(10.6, abs=0.2)
    assert weather.time_mid[0] == np.datetime64("2006-01-01T00:10:34")  # UTC
    assert np.bincount(weather.month)[1] == 744


def test_one_year_in_three_formats():
    csv, other, epw = (read(data_file(f"{PVGIS}.{kind}")) for kind in ("csv", "json", "epw"))
    for name in (*RADIATION, "t_air", "wind", "longwave"):
        assert (getattr(csv, name) == getattr(other, name)).all(), name
    assert epw.stamp.used_min == pytest.approx(70.6, abs=0.2)
    off = (epw.time_mid - csv.time_mid) / np.timedelta64(1, "s")
    assert np.abs(off).max() < 10.0  # an EPW that labels UTC rows as local time: closure brings it to the same instants
    assert epw.ghi == pytest.approx(csv.ghi, abs=0.5)


def test_european_year_without_its_offset(tmp_path):
    lines = data_file(f"{PVGIS}.csv").read_text(encoding="utf-8").splitlines()
    path = tmp_path / "old.csv"
    path.write_text("\n".join([*lines[:3], *lines[4:]]), encoding="utf-8")
    weather = read(path)
    assert (weather.stamp.rule_min, round(weather.stamp.used_min, 1)) == (0.0, 10.6)
    assert "the header has no irradiance time offset: radiation taken as standing on the stamp" in weather.notices


def test_european_year_cut_off(tmp_path):
    for kind, cut in (("csv", 300_000), ("json", 700_000)):
        path = tmp_path / f"cut.{kind}"
        path.write_text(data_file(f"{PVGIS}.{kind}").read_text(encoding="utf-8")[:cut], encoding="utf-8")
        with pytest.raises(InputError, match=r"is cut off; got|can't be read as such; got JSONDecodeError"):
            read(path)


def test_its_table_alone_by_mapping():
    """A bare table of the same source, without a header: the mapping takes it."""
    path = data_file("pvgis_tmy_test.csv")
    names = {"ghi": "G(h)", "dni": "Gb(n)", "dhi": "Gd(h)", "t_air": "T2m", "wind": "WS10m", "humidity": "RH"}
    columns = mapping(stamp="middle", time=("time(UTC)",), time_format="%Y%m%d:%H%M", t_dew=None, **names)
    place = {"latitude_deg": 45.0, "longitude_deg": 8.0, "altitude_m": 250.0, "utc_offset_h": 0.0}
    weather, frame = read(path, place=place, columns=columns), pd.read_csv(path)
    assert weather.ghi.tolist() == frame["G(h)"].tolist()
    assert weather.stamp.used_min == pytest.approx(10.6, abs=0.2)  # found, since the table alone does not say


# --- the American satellite tables


@pytest.mark.parametrize("name", ["test_read_psm3.csv", "test_read_psm4.csv"])
def test_half_hourly_table_keeps_its_energy(name):
    path = data_file(name)
    weather, (frame, _) = read(path), iotools.read_nsrdb_psm4(str(path))
    assert (len(frame), len(weather), weather.step_min) == (17520, 8760, 30.0)
    for ours, theirs in {**{n: n for n in RADIATION}, "wind": "wind_speed"}.items():
        pairs = frame[theirs].to_numpy(dtype=float).reshape(-1, 2).mean(axis=1)
        assert getattr(weather, ours) == pytest.approx(pairs, abs=1e-9), ours
    assert weather.t_air.mean() - 273.15 == pytest.approx(frame["temp_air"].mean(), abs=1e-9)
    assert weather.ghi.sum() == pytest.approx(0.5 * frame["ghi"].sum(), rel=1e-12)
    assert weather.stamp.rule_min == weather.stamp.used_min == 15.0  # of rows at :00 and :30, each at its middle
    assert weather.stamp.found_min == pytest.approx(15.0, abs=0.2)
    said = "steps of 30 min averaged to hours: each hour is the mean of its 2 steps, energy is kept"
    assert said in weather.notices


def test_table_without_header_rows_is_the_same_year():
    whole = read(data_file("test_read_psm4.csv"))
    bare = read(data_file("test_psm4_2023.csv"), place=COLORADO)
    assert bare.format == "American satellite table (NSRDB), bare"
    assert (bare.time_mid == whole.time_mid).all()
    for name in (*RADIATION, "t_air", "wind", "t_dew"):
        assert getattr(bare, name) == pytest.approx(getattr(whole, name), abs=1e-9), name


def test_table_without_header_rows_needs_a_place():
    with pytest.raises(InputError) as caught:
        read(data_file("test_psm4_2023.csv"))
    assert [str(each).partition(": ")[2].partition(";")[0] for each in caught.value.problems] == [
        f"header: {key} is missing" for key in COLORADO
    ]


def test_hourly_table_and_typical_year():
    hourly = read(data_file("test_psm4_full_disc_2023.csv"), place=COLORADO)
    typical = read(data_file("test_psm4_tmy-2023.csv"), place=COLORADO)
    assert hourly.stamp.used_min == typical.stamp.used_min == 0.0
    assert str(hourly.time_mid[0]) == "2023-01-01T07:00:00"
    assert str(typical.time_mid[0]) == "2006-01-01T07:30:00"  # rows on the half hour
    sums = [float(year.ghi.sum()) / 1e3 for year in (hourly, typical)]
    frames = [pd.read_csv(data_file(f"test_psm4_{name}.csv")) for name in ("full_disc_2023", "tmy-2023")]
    assert sums == pytest.approx([frame["GHI"].sum() / 1e3 for frame in frames], abs=1e-6)


def test_satellite_table_in_utc(tmp_path):
    """The same table as it comes when it is asked for in UTC: the instants are the same."""
    text = data_file("test_read_psm4.csv").read_text(encoding="utf-8")
    lines = text.splitlines()
    frame = pd.read_csv(
        data_file("test_read_psm4.csv"), skiprows=2, usecols=lambda name: not name.startswith("Unnamed")
    )
    clock = ["Year", "Month", "Day", "Hour", "Minute"]
    rolled = pd.concat([frame.iloc[-14:], frame.iloc[:-14]])
    rolled[clock] = frame[clock].to_numpy()
    path = tmp_path / "utc.csv"
    head = lines[1].split(",")
    head[7] = "0"
    path.write_text("\n".join([lines[0], ",".join(head), rolled.to_csv(index=False)]), encoding="utf-8")
    found, whole = read(path), read(data_file("test_read_psm4.csv"))
    assert found.site.utc_offset_h == -7.0
    assert found.stamp.used_min == 15.0
    assert found.ghi[7:] == pytest.approx(whole.ghi[:-7], abs=1e-9)
    assert (found.time_mid[7:] == whole.time_mid[:-7]).all()
    assert "the file is in UTC; months go by the header's local time zone" in found.notices


# --- any table


@pytest.mark.parametrize("name", list(STATIONS))
@pytest.mark.parametrize("stamp", ["start", "middle", "end"])
def test_an_east_facing_plane_does_not_feel_the_convention(table, name, stamp):
    station = open_weather(name, base=Path())
    again = table(table_text(frame_of(station), stamp=stamp), stamp=stamp, place=place_of(station))
    assert again.stamp.used_min == {"start": 30.0, "middle": 0.0, "end": -30.0}[stamp]
    east = [
        float(
            on_plane(
                year, sun_position(year), tilt_deg=40.0, azimuth_deg=90.0, albedo=0.2, model="perez-driesse"
            ).total.sum()
        )
        for year in (station, again)
    ]
    assert abs(east[1] / east[0] - 1.0) < 0.005
    assert abs(east[1] / east[0] - 1.0) < 1e-4  # and what is asked is kept with room to spare


@pytest.mark.parametrize(
    ("step", "stamp"),
    [(1, "end"), *((step, stamp) for step in (5, 10, 15, 20, 30) for stamp in ("start", "middle", "end"))],
)
def test_finer_steps_keep_their_energy(table, step, stamp):
    frame = southern_frame(step_min=step)
    form = "%Y-%m-%d %H:%M:%S"
    weather = table(table_text(frame, stamp=stamp, step_min=step, form=form), stamp=stamp, time_format=form)
    assert (len(weather), weather.step_min) == (8760, step)
    assert weather.ghi.sum() == pytest.approx(frame["Global"].sum() * step / 60.0, rel=1e-9)
    assert weather.t_air.mean() - 273.15 == pytest.approx(frame["Air"].mean(), abs=1e-6)
    assert str(weather.time_mid[0]) == "2014-12-31T22:30:00"  # 00:30 at UTC+2
    assert weather.stamp.found_min == pytest.approx(weather.stamp.rule_min, abs=1.0)


def test_missing_steps_within_an_hour(table, told):
    frame = southern_frame(step_min=15)
    frame.loc["2015-06-16 12:00":"2015-06-16 12:25", "Air"] = np.nan
    weather = table(table_text(frame, step_min=15))
    assert "2 steps of 15 min missing within their hours, filled in a straight line" in weather.notices
    assert weather.gaps == ()
    frame.loc["2015-06-16 12:00":"2015-06-16 17:00", "Air"] = np.nan
    (message,) = told(table_text(frame, step_min=15))
    assert message.startswith("made.csv, 2015-06-16 12:00: t_air is missing for 5 h in a row; ")


UNITS = {
    "kJ/m2": (dict.fromkeys(("Global", "Direct", "Diffuse"), 3.6), {"irradiance_unit": "kJ/m2"}),
    "Wh/m2": (dict.fromkeys(("Global", "Direct", "Diffuse"), 1.0), {"irradiance_unit": "Wh/m2"}),
    "MJ/m2": (dict.fromkeys(("Global", "Direct", "Diffuse"), 3.6e-3), {"irradiance_unit": "MJ/m2"}),
    "km/h": ({"Wind": 3.6}, {"wind_unit": "km/h"}),
    "kn": ({"Wind": 3600.0 / 1852.0}, {"wind_unit": "kn"}),
}


@pytest.mark.parametrize("unit", UNITS)
def test_units(table, unit):
    factors, columns = UNITS[unit]
    frame = southern_frame()
    plain, other = table(table_text(frame)), frame.copy()
    for name, factor in factors.items():
        other[name] *= factor
    again = table(table_text(other), **columns)
    for name in (*RADIATION, "wind"):
        assert getattr(again, name) == pytest.approx(getattr(plain, name), rel=1e-9), name


def test_half_hourly_energy_per_step(table):
    frame = southern_frame(step_min=30)
    other = frame.assign(
        **{name: 1.8 * frame[name] for name in ("Global", "Direct", "Diffuse")}
    )  # kJ/m2 of half an hour
    again = table(table_text(other, step_min=30), irradiance_unit="kJ/m2")
    assert again.ghi.sum() == pytest.approx(0.5 * frame["Global"].sum(), rel=1e-9)


@pytest.mark.parametrize("unit", ["K", "F"])
def test_temperatures(table, unit):
    frame = southern_frame()
    plain = table(table_text(frame))
    for name in ("Air", "Dew"):
        frame[name] = frame[name] + 273.15 if unit == "K" else 1.8 * frame[name] + 32.0
    again = table(table_text(frame), temperature_unit=unit)
    assert again.t_air == pytest.approx(plain.t_air, abs=1e-9)
    assert again.t_dew == pytest.approx(plain.t_dew, abs=1e-9)


def test_cloud_pressure_humidity_and_marks(table):
    frame = southern_frame().assign(Oktas=4, hPa=1012.0, RH=60.0)
    frame.iloc[100:102, frame.columns.get_loc("Wind")] = -99.0
    more = {
        "cloud": "Oktas",
        "cloud_unit": "oktas",
        "pressure": "hPa",
        "t_dew": None,
        "humidity": "RH",
        "missing": (-99.0,),
    }
    weather = table(table_text(frame), **more)
    assert (set(weather.cloud.tolist()), weather.pressure) == ({0.5}, 101200.0)
    assert weather.t_dew == pytest.approx(dew_point(weather.t_air, np.full(8760, 0.6)))
    assert [(gap.column, gap.hours) for gap in weather.gaps] == [("wind", 2)]


def test_dew_point_by_hand():
    # 20 C at 50 %: gamma = ln 0.5 + 17.62 * 20 / 263.12 = 0.6462; 243.12 * 0.6462 / (17.62 - 0.6462) = 9.26 C
    assert dew_point(np.array([293.15]), np.array([0.5]))[0] - 273.15 == pytest.approx(9.26, abs=0.005)
    assert np.isnan(dew_point(np.array([293.15, 293.15]), np.array([0.0, 2.0]))).all()


def test_table_of_another_hand(table):
    """Semicolons, decimal commas, date and clock apart, hour 24, two rows of words before the names."""
    frame = southern_frame()
    end = frame.index + pd.Timedelta(minutes=30)
    late = end.hour == 0
    date = (end - pd.to_timedelta(np.where(late, 1, 0), unit="D")).strftime("%d.%m.%Y")
    clock = np.where(late, "24:00", end.strftime("%H:%M"))
    body = frame.assign(Date=date, Clock=clock).to_csv(index=False, sep=";", decimal=",")
    weather = table(
        f"Station 7\nmade\n{body}",
        stamp="end", time=("Date", "Clock"), time_format="%d.%m.%Y %H:%M", separator=";", decimal=",", skip_rows=2,
    )  # fmt: skip
    assert (weather.ghi == table(table_text(frame)).ghi).all()


@pytest.mark.parametrize("zone", ["+02:00", "Z"])
def test_stamps_with_their_own_zone(table, zone):
    frame = southern_frame()
    plain = table(table_text(frame))
    if zone == "Z":
        frame.index -= pd.Timedelta(hours=2)
    weather = table(table_text(frame, form=f"%Y-%m-%dT%H:%M{zone}"))
    assert (weather.time_mid == plain.time_mid).all()
    assert (weather.ghi == plain.ghi).all()
    assert weather.source_years == (2015,)


def test_global_is_made_from_the_other_two(table):
    frame = southern_frame()
    weather = table(table_text(frame.drop(columns="Global")), ghi=None)
    assert weather.made == "ghi by closure"
    assert weather.ghi.sum() / 1e3 == pytest.approx(frame["Global"].sum() / 1e3, rel=5e-3)


def test_messages_about_a_table(told):
    frame = southern_frame().iloc[:200]
    text = table_text(frame)
    assert told(text, wind="Gust", t_air="T") == [
        (
            f"made.csv:1: no single column of the name that place.columns.{key} gives; got '{name}'; allowed: Time, Global, "
            "Direct, Diffuse, Air, Wind, Dew; mend the name under [place.columns], or separator and skip_rows if the row of "
            "names is another"
        )
        for key, name in (("t_air", "T"), ("wind", "Gust"))
    ]
    assert told(text, time_format="%d.%m.%Y") == [
        (
            "made.csv, data row 1: time stamp can't be read; got '2015-01-01 00:00'; allowed: %d.%m.%Y; "
            "give place.columns.time_format, such as '%d.%m.%Y %H:%M'"
        )
    ]
    (message,) = told(table_text(frame.iloc[::3]))
    assert message == (
        "made.csv: rows at an unusable step; got 180 min; allowed: 1 to 60 min, a whole number of steps to the hour; "
        "average or interpolate the table to hours first"
    )
    finer = southern_frame(step_min=30)
    (message,) = told(table_text(pd.concat([finer, finer.iloc[:1]]), step_min=30))
    assert message == (
        "made.csv: a step of the year stands twice; got 1 such steps, first at 2015-01-01 00:00:00; allowed: one row a step"
    )
    (message,) = told(table_text(pd.concat([finer, frame.iloc[:1]]), step_min=30))  # at a quarter past
    assert message == (
        "made.csv: rows off the common step; got 1 rows, first at 2015-01-01 00:15:00; allowed: a row every 30 min; "
        "mend those stamps, or average the table to hours first"
    )
    assert told("") == [f"made.csv: weather file is empty; allowed: a text file: {ALLOWED}"]


# --- several years


def test_two_years_in_order(table):
    frame = southern_frame((2015, 2016))
    weather = table(table_text(frame))
    assert (len(weather), weather.years, weather.source_years) == (8760 + 8784, 2, (2015, 2016))
    assert weather.ghi == pytest.approx(frame["Global"].to_numpy(), abs=1e-9)
    assert (np.diff(weather.time_mid) == np.timedelta64(1, "h")).all()
    assert not any("put on one axis" in said for said in weather.notices)


def test_one_of_two_years(tmp_path):
    frame = southern_frame((2015, 2016))
    path = tmp_path / "made.csv"
    path.write_text(table_text(frame), encoding="utf-8")
    weather = read(path, place=SOUTH, columns=mapping(), year=2016)
    assert (len(weather), weather.years) == (8784, 1)
    assert weather.ghi == pytest.approx(frame["Global"].to_numpy()[8760:], abs=1e-9)
    with pytest.raises(InputError, match="no such calendar year in the file; got 2017; allowed: 2015, 2016"):
        read(path, place=SOUTH, columns=mapping(), year=2017)


def test_two_years_cut_off(told):
    (message,) = told(table_text(southern_frame((2015, 2016)).iloc[:-2000]))
    assert message == (
        "made.csv: not whole calendar years; got 15544 hourly rows, 2000 of 17544 hours absent; allowed: 17544"
    )


# --- the scenario and the command


SCENARIO = (Path(__file__).parents[1] / "scenarios" / "laundry.toml").read_text(encoding="utf-8")
PLACE = """weather = "made.csv"
latitude = -33.9
longitude = 18.4
altitude_m = 40.0
utc_offset_h = 2.0
"""
COLUMNS = """
[place.columns]
time = "Time"
stamp = "start"
ghi = "Global"
dni = "Direct"
dhi = "Diffuse"
t_air = "Air"
wind = "Wind"
t_dew = "Dew"
"""


@pytest.fixture
def mapped(tmp_path):
    def of(*, years=(2015,), columns=COLUMNS):
        (tmp_path / "made.csv").write_text(table_text(southern_frame(years)), encoding="utf-8")
        text = SCENARIO.replace('weather = "greensboro"\n', PLACE).replace("\n[mounting]", f"{columns}\n[mounting]")
        (tmp_path / "mine.toml").write_text(text, encoding="utf-8")
        return str(tmp_path / "mine.toml")

    return of


def run(*words):
    return CliRunner().invoke(main, [str(word) for word in words])


def test_scenario_with_a_table(mapped):
    result = run("check", mapped())
    assert result.exit_code == 0, result.stderr
    assert "table by [place.columns], 8760 h" in result.stdout


def test_scenario_with_two_years(mapped):
    path = mapped(years=(2015, 2016))
    result = run("year", path)
    assert result.exit_code == 2
    assert result.stderr.endswith(
        "made.csv: weather file holds 2 years; got 2015 to 2016, 17544 h; allowed: one year at a time; "
        "choose one with place.year, such as --set place.year=2015\n"
    )
    assert run("check", path, "--set", "place.year=2016").exit_code == 0
    result = run("weather", path)
    assert result.exit_code == 0
    assert "Each calendar year" in result.stdout


@pytest.mark.parametrize(
    ("change", "message"),
    [
        (('stamp = "start"', 'stamp = "begin"'), "place.columns.stamp: unknown name; got 'begin'; allowed: 'start', "),
        (('ghi = "Global"\n', ""), ""),
        (
            ('ghi = "Global"\ndni = "Direct"\n', ""),
            "place.columns.ghi: not enough radiation; allowed: ghi, or dni with dhi",
        ),
        (('t_dew = "Dew"', 't_dew = "Dew"\nhumidity = "RH"'), "place.columns.humidity: keys that exclude each other"),
        (
            ('wind = "Wind"', 'wind = "Wind"\ndecimal = ","'),
            "place.columns.decimal: separator and decimal are the same",
        ),
        (('t_air = "Air"\n', ""), "place.columns.t_air: required key missing"),
    ],
)
def test_faults_of_a_mapping(mapped, change, message):
    result = run("check", mapped(columns=COLUMNS.replace(*change)))
    assert result.exit_code == (2 if message else 0)
    assert message in result.stderr


def test_weather_of_a_station(tmp_path):
    result = run("weather", "sand-point", "--out", tmp_path / "out")
    assert result.exit_code == 0
    assert result.stdout.isascii()
    assert max(len(line) for line in result.stdout.splitlines()) <= 80
    assert "Year    829.2    819.2    460.9" in result.stdout
    assert {path.name for path in (tmp_path / "out").iterdir()} == {"weather.json", "weather.png"}


def test_weather_of_a_file_as_json(tmp_path):
    import json

    (tmp_path / "plain.epw").write_text(epw_text(epw_rows()), encoding="ascii")
    found = json.loads(run("weather", tmp_path / "plain.epw", "--json").stdout)
    assert (found["format"], found["hours"], found["step_min"], found["gaps"]) == ("EPW", 8760, 60.0, [])
    assert [each["name"] for each in found["findings"]] == ["still-wind"]
    assert sum(month["ghi_kWh_m2"] for month in found["months"]) == pytest.approx(found["ghi_kWh_m2"])


def test_weather_of_nothing():
    result = run("weather", "nowhere.epw")
    assert result.exit_code == 2
    assert result.stderr.startswith("noonplate: nowhere.epw: weather file cannot be read: No such file or directory; ")


def test_formats_are_told_apart():
    assert len({each.name for each in FORMATS}) == len(FORMATS)


def test_a_day_twice_in_a_typical_year_of_many_years(tmp_path):
    rows = [[str(1985 + 2 * int(row[1])), *row[1:]] for row in epw_rows()]
    rows += rows[-24 * 5 :]
    (tmp_path / "made.epw").write_text(epw_text(rows), encoding="ascii")
    with pytest.raises(InputError, match="an hour of the year stands twice; got 120 such hours"):
        read(tmp_path / "made.epw")


def test_years_without_their_leap_day(table):
    frame = southern_frame((2015, 2016))
    frame = frame[~((frame.index.month == 2) & (frame.index.day == 29))]
    weather = table(table_text(frame))
    assert (len(weather), weather.years) == (2 * 8760, 2)
