"""Checks of a weather file: each planted fault is found under its name, real years are not accused, and a year stops or goes on."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner

from collector.cli import main
from tests.measured.archive import data_file, typical_files
from tests.weather_samples import Tmy3
from tests.weather_tables import SOUTH, frame_of, mapping, place_of, southern_frame, table_text
from weather.components import DECOMPOSITIONS, MEASURED, completed
from weather.errors import InputError
from weather.files import read
from weather.gate import ACCEPTABLE
from weather.limits import POSSIBLE, beyond, beyond_longwave, disagreeing
from weather.stations import STATIONS, open_weather
from weather.sun import sun_position

JUNE = slice("2006-06-10", "2006-06-16")


@pytest.fixture(scope="module")
def greensboro():
    return open_weather("greensboro", base=Path())


@pytest.fixture
def planted(tmp_path, greensboro):
    """The findings, or the message, about Greensboro's year with a fault in it."""

    def plant(change, *, place=None, **named):
        frame = change(frame_of(greensboro))
        path = tmp_path / "made.csv"
        path.write_text(frame if isinstance(frame, str) else table_text(frame, **named), encoding="utf-8")
        try:
            weather = read(path, place=place_of(greensboro) | (place or {}), columns=mapping())
        except InputError as fault:
            return str(fault)
        return {each.name: each for each in weather.findings}

    return plant


def in_hours(frame, name, hours, value):
    frame.loc[hours, name] = value
    return frame


def renamed(frame, **names):
    return frame.rename(columns=names)


# --- planted faults


def test_the_year_without_a_fault_has_no_grave_finding(planted):
    found = planted(lambda frame: frame)
    assert not any(each.severity != "note" for each in found.values())


@pytest.mark.parametrize("hours", [-1, 1, 2])
def test_shifted_by_hours(planted, hours):
    found = planted(
        lambda frame: frame.assign(**{n: np.roll(frame[n], hours) for n in ("Global", "Direct", "Diffuse")})
    )
    assert found["clock"].what.startswith(f"the clock is {-60 * hours:+d} min from ")


def test_wrong_utc_offset(planted):
    assert planted(lambda frame: frame, place={"utc_offset_h": -6.0})["clock"].severity == "warn"
    message = planted(lambda frame: frame, place={"utc_offset_h": 5.0})
    assert "clock and longitude do not belong together" in message


SWAPS = {
    "GHI and DNI": {"Global": "Direct", "Direct": "Global"},
    "GHI and DHI": {"Global": "Diffuse", "Diffuse": "Global"},
    "DNI and DHI": {"Direct": "Diffuse", "Diffuse": "Direct"},
    "all three": {"Global": "Direct", "Direct": "Diffuse", "Diffuse": "Global"},
}


@pytest.mark.parametrize("names", SWAPS.values(), ids=SWAPS)
def test_swapped_columns(planted, names):
    found = planted(lambda frame: renamed(frame, **names))
    if isinstance(found, str):
        assert ": swapped-columns: columns of radiation are in another order: what stands as " in found
    else:
        assert found["swapped-columns"].severity == "stop"


def test_fahrenheit(planted):
    message = planted(lambda frame: frame.assign(Air=1.8 * frame["Air"] + 32.0, Dew=1.8 * frame["Dew"] + 32.0))
    assert (
        ": temperature-unit: air temperature has a mean of 58 C and goes to 96 C: the column is in Fahrenheit "
        in message
    )
    assert "give its unit under [place.columns]" in message


def test_kelvin(planted):
    assert "the column is in kelvin" in planted(lambda frame: frame.assign(Air=frame["Air"] + 273.15))


def test_wind_in_km_h(planted):
    found = planted(lambda frame: frame.assign(Wind=3.6 * frame["Wind"]))
    assert found["wind-unit"].severity == "stop"


@pytest.mark.parametrize(
    ("factor", "unit"),
    [
        (3.6, "kJ/m2 an hour, read as W/m2"),
        (1 / 3.6, "read as kJ/m2 an hour"),
        (0.5, "Wh/m2 of half an hour"),
        (1e-3, "kW/m2"),
    ],
)
def test_irradiance_in_another_unit(planted, factor, unit):
    names = ("Global", "Direct", "Diffuse")
    found = planted(lambda frame: frame.assign(**{name: factor * frame[name] for name in names}))
    words = found if isinstance(found, str) else found["irradiance-unit"].what
    assert unit in words
    assert isinstance(found, str) == (factor > 1.0)  # beyond the limits, so that there is no year to accept


def test_doubled_day(planted):
    def double(frame):
        frame.loc["2006-06-11"] = frame.loc["2006-06-10"].to_numpy()
        return frame

    found = planted(double)["doubled-day"]
    assert (found.hours, found.first) == (24, "2006-06-11 00:00")


def test_day_that_stands_twice(planted, greensboro):
    message = planted(lambda frame: pd.concat([frame, frame.loc["2006-06-10"]]))
    assert "an hour of the year stands twice; got 24 such hours, first at 2006-06-10 00:00:00" in message


def test_missing_week(planted):
    message = planted(lambda frame: frame.drop(frame.loc[JUNE].index))
    assert message.partition("made.csv")[2] == (
        ", 2006-06-10 00:00: 168 hours in a row are missing from the rows; got 8592 of 8760 hours; the next row is "
        "2006-06-17 00:00; allowed: one row an hour, single hours missing at most; put the missing days back, or use another "
        "year or file"
    )


def test_week_of_blanks(planted):
    message = planted(lambda frame: in_hours(frame, "Wind", JUNE, np.nan))
    assert "2006-06-10 00:00: wind is missing for 168 h in a row; " in message


def test_stuck_sensors(planted):
    day = slice("2006-07-03 09:00", "2006-07-03 17:00")
    found = planted(lambda frame: in_hours(in_hours(frame, "Global", day, 512.0), "Wind", JUNE, 3.17))
    assert (found["stuck-ghi"].hours, found["stuck-ghi"].first) == (8, "2006-07-03 09:00")
    assert (found["stuck-wind"].hours, found["stuck-wind"].first) == (168, "2006-06-10 00:00")
    assert planted(lambda frame: in_hours(frame, "Air", JUNE, 20.07))["stuck-air"].hours == 168


def test_wind_that_never_moves(planted):
    assert planted(lambda frame: frame.assign(Wind=2.0))["still-wind"].hours == 8760


def test_negative_night(planted):
    found = planted(lambda frame: frame.assign(Global=frame["Global"].where(frame["Global"] > 0.0, -6.5)))
    assert found["negative-night"].what == "irradiance below zero, down to -6.5 W/m2; taken as 0"


def test_light_at_night(planted):
    night = slice("2006-06-10 00:00", "2006-06-10 03:00")
    assert planted(lambda frame: in_hours(frame, "Global", night, 80.0))["light-at-night"].hours == 3


def test_dew_point_above_the_air(planted):
    found = planted(lambda frame: in_hours(frame, "Dew", JUNE, 45.0))["dew-above-air"]
    assert (found.severity, found.hours) == ("warn", 168)
    assert planted(lambda frame: renamed(frame, Air="Dew", Dew="Air"))["dew-above-air"].severity == "stop"


def test_jumps(planted):
    def leap(frame):
        frame.loc[JUNE, "Air"] += np.where(np.arange(168) % 2, 14.0, -14.0)
        return frame

    found = planted(leap)["jump-air"]
    assert found.severity == "warn"
    assert found.hours > 160


def test_impossible_sunlight(planted):
    found = planted(lambda frame: in_hours(frame, "Diffuse", slice("2006-12-10 12:00", "2006-12-10 13:00"), 900.0))
    assert found["impossible"].hours == 1
    assert found["impossible"].what == "DHI 1 h above what is physically possible"


def test_truncated_file(planted):
    message = planted(lambda frame: table_text(frame)[:300_000])
    assert "not a whole year; got " in message


def test_binary_junk(planted, tmp_path):
    path = tmp_path / "junk.csv"
    path.write_bytes(np.random.default_rng(1).integers(0, 256, 50_000, dtype=np.uint8).tobytes())
    for columns in (None, mapping()):
        with pytest.raises(InputError, match="weather file is binary, not text"):
            read(path, columns=columns)
    path.write_bytes(np.random.default_rng(1).integers(1, 256, 50_000, dtype=np.uint8).tobytes())  # without a zero
    for columns in (None, mapping()):
        with pytest.raises(InputError):
            read(path, columns=columns)


def test_wrong_hemisphere(planted, tmp_path):
    found = planted(lambda frame: frame, place={"latitude_deg": -36.1})
    words = found if isinstance(found, str) else found["hemisphere"].what
    assert "latitude 36.1 fits instead of -36.1" in words
    path = tmp_path / "south.csv"
    path.write_text(table_text(southern_frame()), encoding="utf-8")
    assert "latitude -33.9 fits instead of 33.9" in said_of(path, place=SOUTH | {"latitude_deg": 33.9})


def said_of(path, *, place):
    """All findings, or the message."""
    try:
        return "; ".join(each.sentence for each in read(path, place=place, columns=mapping()).findings)
    except InputError as fault:
        return str(fault)


def test_a_southern_year_is_sound(tmp_path):
    path = tmp_path / "south.csv"
    path.write_text(table_text(southern_frame()), encoding="utf-8")
    weather = read(path, place=SOUTH, columns=mapping())
    assert weather.stamp.found_min == pytest.approx(30.0, abs=0.5)
    assert not any(each.severity == "stop" for each in weather.findings)
    assert weather.ghi[weather.month == 12].sum() > 2.0 * weather.ghi[weather.month == 6].sum()


# --- real years


REAL = (
    "NLD_Amsterdam062400_IWEC.epw",
    "tmy_45.000_8.000_2005_2023.epw",
    "tmy_45.000_8.000_2005_2023.csv",
    "tmy_45.000_8.000_2005_2023.json",
    "test_read_psm3.csv",
    "test_read_psm4.csv",
)


@pytest.mark.parametrize("name", [*STATIONS, *REAL])
def test_no_real_year_is_stopped(name):
    weather = open_weather(name, base=Path()) if name in STATIONS else read(data_file(name))
    assert [each.sentence for each in weather.findings if each.severity == "stop"] == []
    warned = {each.name for each in weather.findings if each.severity == "warn"}
    assert warned == ({"clock"} if name.endswith("2023.epw") else set())


def test_typical_years_of_another_source():
    warned = {}
    for path in typical_files():
        weather = read(path)
        assert not any(each.severity == "stop" for each in weather.findings)
        warned[weather.site.name] = {each.name for each in weather.findings if each.severity == "warn"}
    assert warned == {
        "Northway AP": {"stuck-air", "stuck-wind"},  # the Yukon's winter: days of calm
        "Mount.Shasta": {"clock"},  # radiation at the stamp itself
        "Chicago OHare Intl AP": set(),
    }


# --- limits, against numbers worked out by hand from the printed formulae


def test_limits_by_hand():
    cosine, extra = np.array([0.5, 0.0]), np.array([1361.0, 1361.0])
    edge = 1.5 * 1361.0 * 0.5**1.2 + 100.0  # 988.6
    for values, wanted in (((edge - 0.1, 99.9), [False, False]), ((edge + 0.1, 100.1), [True, True])):
        found = beyond(np.array(values), limit=POSSIBLE["ghi"], cosine=cosine, dni_extra=extra)
        assert found.tolist() == wanted
    black = 5.670374419e-8 * 283.15**4  # 364.5
    given = np.array([0.39 * black, 0.41 * black, black + 24.0, black + 26.0])
    assert beyond_longwave(given, t_air=np.full(4, 283.15)).tolist() == [True, False, False, True]


def test_components_by_hand():
    off, told = disagreeing(
        ghi=np.array([440.0, 425.0, 56.0, 60.0, 30.0]),
        dni=np.array([600.0, 600.0, 0.0, 0.0, 0.0]),
        dhi=np.array([100.0, 100.0, 51.0, 51.0, 30.0]),
        zenith_deg=np.array([60.0, 60.0, 80.0, 80.0, 60.0]),
    )
    assert told.tolist() == [True, True, True, True, False]
    assert off.tolist() == [True, False, False, True, False]  # 10 %, 6.25 %, 9.8 %, 17.6 %


# --- decomposition


@pytest.mark.parametrize("model", DECOMPOSITIONS)
def test_what_is_said_of_a_decomposition_is_so(model):
    errors, sums = [], []
    for name in STATIONS:
        weather = open_weather(name, base=Path())
        made, how, (said,) = completed(
            {"ghi": weather.ghi}, sun=sun_position(weather), time=weather.time_mid, model=model, file="x"
        )
        lit = weather.ghi > 0.0
        errors.append(np.sqrt(np.mean((made["dni"] - weather.dni)[lit] ** 2)))
        sums.append(100.0 * (made["dni"].sum() / weather.dni.sum() - 1.0))
        assert how == f"dni and dhi by '{model}'"
        assert f"{MEASURED[model][0]} to {MEASURED[model][1]} W/m2 rms" in said
    found = (round(min(errors)), round(max(errors)), round(min(sums)), round(max(sums)))
    assert found == pytest.approx(MEASURED[model], abs=0.6)


def test_global_irradiance_alone(tmp_path, greensboro):
    frame = frame_of(greensboro)[["Global", "Air", "Wind"]]
    path = tmp_path / "ghi.csv"
    path.write_text(table_text(frame), encoding="utf-8")
    columns = mapping(dni=None, dhi=None, t_dew=None)
    weather = read(path, place=place_of(greensboro), columns=columns, decomposition="disc")
    assert weather.made == "dni and dhi by 'disc'"
    assert weather.dni.sum() / greensboro.dni.sum() == pytest.approx(0.955, abs=0.01)
    assert (weather.ghi == greensboro.ghi).all()
    wrong = read(path, place=place_of(greensboro) | {"latitude_deg": -36.1}, columns=columns)
    assert "hemisphere" in {each.name for each in wrong.findings}


# --- what a year does about it


@pytest.fixture
def scenario(tmp_path):
    """The laundry on a weather file whose GHI and DNI stand in each other's place."""
    made = Tmy3()
    ghi, dni = made.names.index("GHI (W/m^2)"), made.names.index("DNI (W/m^2)")
    made.names[ghi], made.names[dni] = made.names[dni], made.names[ghi]
    (tmp_path / "swapped.csv").write_text(made.text, encoding="latin-1")
    laundry = Path(__file__).parents[1] / "scenarios" / "laundry.toml"
    place = tmp_path / "mine.toml"
    place.write_text(laundry.read_text(encoding="utf-8").replace('"greensboro"', '"swapped.csv"'), encoding="utf-8")
    return str(place)


def test_a_grave_finding_stops_and_can_be_accepted(scenario):
    for command in ("check", "year"):
        result = CliRunner().invoke(main, [command, scenario])
        assert result.exit_code == 2
        assert "swapped-columns: columns of radiation are in another order: what stands as " in result.stderr
        assert "or take it as it is with --accept swapped-columns" in result.stderr
        assert result.stderr.count("--accept") == 1  # what follows from it does not stop too
        result = CliRunner().invoke(main, [command, scenario, "--accept", "swapped-columns"])
        assert result.exit_code == 0, result.stderr
        assert "swapped-columns: columns" in " ".join(result.stdout.split())
        assert command == "year" or " about its weather, see below\n" in result.stdout
    result = CliRunner().invoke(main, ["check", scenario, "--set", "place.accept=['swapped-columns']"])
    assert result.exit_code == 0


def test_no_such_finding_to_accept():
    laundry = str(Path(__file__).parents[1] / "scenarios" / "laundry.toml")
    result = CliRunner().invoke(main, ["check", laundry, "--accept", "swaped-columns"])
    assert result.exit_code == 2
    assert result.stderr == (
        f"noonplate: --accept: no such finding; got 'swaped-columns'; allowed: {', '.join(ACCEPTABLE)}; "
        "did you mean swapped-columns?\n"
    )
