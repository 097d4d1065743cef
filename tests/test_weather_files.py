"""Weather files: what the bundled years hold, what is mended and counted, and what a user is told of a file that won't do."""

from __future__ import annotations

import io
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from pvlib import iotools

from collector.build.reading import read_scenario
from collector.study.year import heat_years
from tests.weather_samples import (
    EPW,
    EPW_MISSING,
    TMY2_MISSING,
    Tmy2,
    Tmy3,
    epw_rows,
    epw_text,
    hour_of_year,
    set_epw,
)
from weather.errors import InputError
from weather.files import read
from weather.formats.known import ALLOWED
from weather.sky import MODELS, NEEDS, available_models, sky_temperature
from weather.stations import STATIONS, open_weather
from weather.sun import sun_position

LAUNDRY = Path(__file__).parents[1] / "scenarios" / "laundry.toml"
SUMS = {  # kWh/m2 of GHI, DNI, DHI: the columns added up as pvlib 0.16.1 reads them
    "greensboro": (1566.203, 1476.549, 682.223),
    "sand-point": (829.243, 819.209, 460.947),
    "miami": (1792.618, 1504.922, 809.504),
}
RULES = {
    "greensboro": -30.0,
    "sand-point": -30.0,
    "miami": 30.0,
}  # min; TMY3 stamps an hour's end, pvlib's TMY2 its start
COLUMNS = ("ghi", "dni", "dhi", "t_air", "wind", "t_dew", "cloud", "longwave", "albedo")
NOON = hour_of_year(6, 16, 12)
FILLED = "filled in a straight line (gaps up to 3 h)"


@pytest.fixture(scope="module", params=list(STATIONS))
def station(request):
    return request.param, open_weather(request.param, base=Path())


@pytest.fixture(scope="module")
def greensboro():
    return open_weather("greensboro", base=Path())


@pytest.fixture(scope="module")
def plain(tmp_path_factory):
    """The EPW year of our own, nothing wrong with it."""
    path = tmp_path_factory.mktemp("plain") / "plain.epw"
    path.write_text(epw_text(epw_rows()), encoding="ascii")
    return read(path)


@pytest.fixture
def of(tmp_path):
    """The year that this text comes to."""

    def read_text(text: str | bytes, **place: float):
        path = tmp_path / "made.dat"
        path.write_bytes(text if isinstance(text, bytes) else text.encode("latin-1"))
        return read(path, place=place)

    return read_text


@pytest.fixture
def told(of, tmp_path):
    """What is said of this text, a string a fault; the file goes by `made.dat`."""

    def tell(text: str | bytes, **place: float) -> list[str]:
        with pytest.raises(InputError) as caught:
            of(text, **place)
        return [str(problem).replace(f"{tmp_path}/", "") for problem in caught.value.problems]

    return tell


# --- the bundled years


def test_station_is_a_whole_year(station):
    name, weather = station
    assert len(weather) == 8760
    assert name in weather.file
    for column in COLUMNS:
        values = getattr(weather, column)
        assert values is None or (values.shape == (8760,) and np.isfinite(values).all()), column
    assert (np.diff(weather.time_mid) == np.timedelta64(1, "h")).all()
    hours = [744, 672, 744, 720, 744, 720, 744, 744, 720, 744, 720, 744]  # of the months of a plain year
    assert np.bincount(weather.month)[1:].tolist() == hours


def test_station_sums(station):
    name, weather = station
    sums = [float(values.sum()) / 1e3 for values in (weather.ghi, weather.dni, weather.dhi)]
    assert sums == pytest.approx(SUMS[name], abs=5e-4)  # whole Wh/m2 in the files, so three digits are exact


def test_station_sums_from_the_lines_themselves():
    tmy3, tmy2 = Tmy3(), Tmy2()
    places = [tmy3.names.index(f"{name} (W/m^2)") for name in ("GHI", "DNI", "DHI")]
    assert [sum(int(row[place]) for row in tmy3.rows) / 1e3 for place in places] == list(SUMS["greensboro"])
    spans = [(17, 21), (23, 27), (29, 33)]  # positions in the TMY2 manual, a blank first
    assert [sum(int(row[first:last]) for row in tmy2.rows) / 1e3 for first, last in spans] == list(SUMS["miami"])


def test_station_stamps(station):
    name, weather = station
    assert weather.stamp.rule_min == RULES[name]
    assert weather.stamp.found_min == pytest.approx(RULES[name], abs=2.0)
    assert weather.stamp.used_min == RULES[name]
    assert weather.stamp.rmse_w_m2 < 0.5 * weather.stamp.rmse_unshifted_w_m2


def test_station_arrays_are_read_only(station):
    _, weather = station
    for column in (*COLUMNS, "time_mid", "month"):
        values = getattr(weather, column)
        if values is not None:
            with pytest.raises(ValueError, match="read-only"):
                values[0] = values[1]


def test_station_units(station):
    _, weather = station
    assert 250.0 < weather.t_air.min() < weather.t_air.mean() < weather.t_air.max() < 315.0  # K
    assert 0.0 <= weather.cloud.min() < weather.cloud.max() == 1.0
    assert 95e3 < weather.pressure < 103e3  # Pa; all three lie below 300 m


def test_station_years_are_counted(greensboro):
    years = {int(row[0][6:]) for row in Tmy3().rows}
    assert set(greensboro.source_years) == years
    wanted = f"rows come from {len(years)} calendar years ({min(years)}-{max(years)}), put on one axis of 2006"
    assert wanted in greensboro.notices


def test_albedo_that_the_file_marks_as_unknown(greensboro):
    assert {(row[-10], row[-9]) for row in Tmy3().rows} >= {("0.00", "?")}  # 0 with the flag for "no source"
    assert greensboro.albedo is None
    with pytest.raises(InputError) as caught:
        heat_years(read_scenario(LAUNDRY, overrides=["place.albedo=file"]), weather=greensboro)
    assert str(caught.value) == (
        f"{greensboro.file}: albedo = 'file', but the file has no usable albedo; give place.albedo as a number, 0 to 1"
    )


def test_albedo_of_sand_point():
    weather = open_weather("sand-point", base=Path())
    assert set(weather.albedo[weather.month == 1].tolist()) == {0.24}  # as the file's lines have it, all with a source
    assert set(weather.albedo[weather.month == 12].tolist()) == {0.25}


def test_albedo_that_the_file_knows(of):
    every = range(8760)
    weather = of(Tmy3().set("albedo", hours=every, value="0.25").set("albedo_source", hours=every, value="F").text)
    assert weather.albedo.tolist() == [0.25] * 8760
    assert heat_years(read_scenario(LAUNDRY, overrides=["place.albedo=file"]), weather=weather)


def test_albedo_with_a_number_but_flagged_as_unknown(of):
    assert (
        of(
            Tmy3()
            .set("albedo", hours=range(8760), value="0.25")
            .set("albedo_source", hours=range(8760), value="?")
            .text
        ).albedo
        is None
    )


# --- naming a station or a file


@pytest.mark.parametrize(
    ("name", "do"),
    [
        ("greenboro", "did you mean 'greensboro'?"),
        ("sandpoint", "did you mean 'sand-point'?"),
        ("Miami", "did you mean 'miami'?"),
        ("qqq", "name a station, or give a file's path"),
    ],
)
def test_station_misspelt(tmp_path, name, do):
    with pytest.raises(InputError) as caught:
        open_weather(name, base=tmp_path)
    assert str(caught.value) == (
        f"place.weather: neither a bundled station nor a file; got '{name}'; "
        f"allowed: greensboro, sand-point, miami; {do}"
    )


def test_missing_file(tmp_path):
    with pytest.raises(InputError) as caught:
        open_weather("nowhere.epw", base=tmp_path)
    assert str(caught.value) == (
        f"{tmp_path / 'nowhere.epw'}: weather file cannot be read: No such file or directory; "
        "check the path (it counts from the scenario file), or name a bundled station"
    )


def test_folder_for_a_file(tmp_path):
    (tmp_path / "years").mkdir()
    with pytest.raises(InputError) as caught:
        open_weather("years", base=tmp_path)
    assert str(caught.value).startswith(f"{tmp_path / 'years'}: weather file cannot be read: Is a directory; ")


def test_path_counts_from_the_base(tmp_path):
    (tmp_path / "near").mkdir()
    (tmp_path / "near" / "my.epw").write_text(epw_text(epw_rows()), encoding="ascii")
    assert open_weather("near/my.epw", base=tmp_path).site.name == "Testfield"
    (tmp_path / "noending").write_text(epw_text(epw_rows()), encoding="ascii")
    assert open_weather("noending", base=tmp_path).format == "EPW"


# --- not a weather file


@pytest.mark.parametrize("content", [b"", b" \n\n \n"])
def test_empty(told, content):
    assert told(content) == [f"made.dat: weather file is empty; allowed: a text file: {ALLOWED}"]


def test_binary(told):
    assert told(b"LOCATION,\x00\x01\x02") == [
        f"made.dat: weather file is binary, not text; allowed: a text file: {ALLOWED}"
    ]


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("time;ghi;t_air\n2005;0;1\n", "'time;ghi;t_air'"),
        ("x" * 200 + "\n", repr("x" * 60)),
        ("PLACE" + epw_text(epw_rows())[8:], "'PLACE,Testfield,-,XXX,made,000000,45.0,10.0,1.0,100.0'"),
    ],
    ids=["other table", "long line", "EPW without its first word"],
)
def test_unknown_format(told, text, shown):
    assert told(text) == [
        (
            f"made.dat:1: weather file of unknown format; got {shown}; allowed: {ALLOWED}; "
            "for another table in CSV name its columns in the scenario, under [place.columns]"
        )
    ]


# --- the made files are read by pvlib, and hold what they say


def test_made_epw_as_pvlib_reads_it(plain):
    rows = epw_rows()
    frame, meta = iotools.read_epw(io.StringIO(epw_text(rows)))
    assert (len(frame), meta["latitude"], meta["longitude"], meta["TZ"]) == (8760, 45.0, 10.0, 1.0)
    pairs = {"ghi": "ghi", "dni": "dni", "dhi": "dhi", "t_air": "temp_air", "t_dew": "temp_dew", "wind": "wind_speed"}
    for ours, theirs in pairs.items():
        assert frame[theirs].tolist() == [float(row[EPW[ours]]) for row in rows], ours
    assert plain.ghi.tolist() == frame["ghi"].tolist()
    assert plain.t_air == pytest.approx(frame["temp_air"].to_numpy() + 273.15, abs=1e-9)


def test_made_tmy3_and_tmy2_as_pvlib_reads_them(tmp_path):
    tmy3 = Tmy3().set("t_air", hours=range(100, 101), value="-12.3").set("ghi", hours=range(101, 102), value="7")
    frame, _ = iotools.read_tmy3(io.StringIO(tmy3.text), coerce_year=2006)
    assert (frame["temp_air"].iloc[100], frame["ghi"].iloc[101], len(frame)) == (-12.3, 7, 8760)
    tmy2 = Tmy2().set("t_air", hours=range(100, 101), value="-123").set("wind", hours=range(101, 102), value="77")
    tmy2.rows = tmy2.rows[:200]  # its reader is slow
    path = tmp_path / "made.tm2"
    path.write_text(tmy2.text, encoding="ascii")
    frame, _ = iotools.read_tmy2(str(path))
    assert (frame["DryBulb"].iloc[100], frame["Wspd"].iloc[101], len(frame)) == (-123, 77, 200)


def test_made_epw_is_sound(plain):
    assert plain.notices == ()
    assert plain.stamp.rule_min == plain.stamp.used_min == 30.0
    assert plain.stamp.found_min == pytest.approx(
        30.0, abs=0.1
    )  # made so: closure at mid-hour, a tenth of a W/m2 rounded
    assert plain.source_years == (2005,)
    assert plain.time_mid[0] == np.datetime64("2004-12-31T23:30")  # 00:30 at UTC+1
    for column in COLUMNS:
        assert np.isfinite(getattr(plain, column)).all(), column
    assert set(plain.longwave.tolist()) == {310.0}
    assert set(plain.cloud.tolist()) == {0.2}
    assert plain.pressure == pytest.approx(100100.0)


def test_epw_minutes_do_not_matter(of, plain):
    weather = of(epw_text(epw_rows(minute=0)))
    assert (weather.time_mid == plain.time_mid).all()
    assert (weather.ghi == plain.ghi).all()


def test_line_ends_of_windows(of, plain):
    assert (of(epw_text(epw_rows()).replace("\n", "\r\n")).ghi == plain.ghi).all()


# --- the header


def test_comma_in_the_name_of_an_epw(told):
    assert told(epw_text(epw_rows(), city="Testfield, North")) == [
        (
            "made.dat:1: EPW header LOCATION needs ten fields; a comma in the place's name shifts the others; "
            "got 11 fields: LOCATION,Testfield, North,-,XXX,made,000000,45.0,10.0,1.0,100.0; mend the first line"
        )
    ]


def test_comma_in_quotes_is_no_fault(of, plain):
    weather = of(epw_text(epw_rows(), city='"Testfield, North"'))
    assert weather.site.name.split() == ["Testfield", "North"]
    assert (weather.ghi == plain.ghi).all()


def test_comma_in_the_name_of_a_tmy3(told):
    made = Tmy3()
    made.head = "723170,GREENSBORO, NORTH,NC,-5.0,36.100,-79.950,273"
    assert told(made.text) == [
        (
            "made.dat:1: TMY3 header needs seven fields: code, name, state, UTC offset, latitude, longitude, altitude; "
            f"got {made.head!r}; mend the first line"
        )
    ]


IMPOSSIBLE = {
    "latitude": ("95.5", "latitude_deg is impossible; got 95.5; allowed: -90 to 90"),
    "longitude": ("-190.0", "longitude_deg is impossible; got -190; allowed: -180 to 180"),
    "altitude": ("12345.0", "altitude_m is impossible; got 12345; allowed: -450 to 9000"),
    "offset": ("15.0", "utc_offset_h is impossible; got 15; allowed: -12 to 14"),
}
MEND = "a comma in the place's name shifts the header; mend it, or give the value under [place]"


@pytest.mark.parametrize("key", IMPOSSIBLE)
def test_impossible_place(told, key):
    value, message = IMPOSSIBLE[key]
    assert told(epw_text(epw_rows(), **{key: value})) == [f"made.dat: header: {message}; {MEND}"]


def test_impossible_place_all_at_once(told):
    given = {key: value for key, (value, _) in IMPOSSIBLE.items()}
    wanted = [f"made.dat: header: {message}; {MEND}" for _, message in IMPOSSIBLE.values()]
    assert told(epw_text(epw_rows(), **given)) == wanted


def test_no_number_for_a_place(told):
    for word in ("nan", "north", ""):
        assert told(epw_text(epw_rows(), latitude=word)) == [
            f"made.dat: header: latitude_deg is missing; got no number; allowed: -90 to 90; {MEND}"
        ]
    made = Tmy3()
    made.head = "USAF?,NOWHERE,XX,,36.1,,273"
    assert [message.partition(";")[0] for message in told(made.text)] == [
        "made.dat: header: longitude_deg is missing",
        "made.dat: header: utc_offset_h is missing",
    ]
    other = Tmy2()
    other.head = other.head.replace("N 25 48", "?      ")
    assert told(other.text) == [f"made.dat: header: latitude_deg is missing; got no number; allowed: -90 to 90; {MEND}"]


def test_clock_that_does_not_fit_the_longitude(told):
    assert told(epw_text(epw_rows(), offset="-5.0")) == [  # 10 E is 0.67 h: 5.67 h apart
        (
            "made.dat: header: clock and longitude do not belong together; got longitude 10, UTC offset -5 h; "
            f"allowed: an offset within 4 h of longitude/15; {MEND}"
        )
    ]


def test_clock_across_the_date_line_is_no_fault(of):
    # 176 W keeps UTC+13 in places: longitude/15 is -11.7 h, a day and 0.7 h away
    rows = [[*row[:13], "0", "0", "0", *row[16:]] for row in epw_rows()]
    assert of(epw_text(rows, longitude="-176.0", offset="13.0")).site.utc_offset_h == 13.0


def test_values_under_place_stand_in_for_the_header(of, plain):
    weather = of(epw_text(epw_rows(), latitude="95.0", altitude="77.0"), latitude_deg=45.0, altitude_m=100.0)
    assert weather.site == plain.site
    assert weather.notices == (
        "latitude_deg as given under [place], not as in the file",
        "altitude_m as given under [place], not as in the file",
    )


def test_values_under_place_are_checked_too(told):
    assert told(epw_text(epw_rows()), longitude_deg=120.0) == [  # 8 h against 1 h
        (
            "made.dat: header: clock and longitude do not belong together; got longitude 120, UTC offset 1 h; "
            f"allowed: an offset within 4 h of longitude/15; {MEND}"
        )
    ]


def test_values_under_place_fill_a_blank(of, greensboro):
    weather = of(epw_text(epw_rows(), latitude=""), latitude_deg=45.0)
    assert weather.site.latitude_deg == 45.0
    assert weather.notices == ("latitude_deg as given under [place]; the file has none",)
    made = Tmy3()
    made.head = made.head.replace("-5.0", "")
    assert of(made.text, utc_offset_h=-5.0).site == greensboro.site
    other = Tmy2()
    other.head = other.head[:55]  # without its elevation
    assert of(other.text, altitude_m=2.0).site.altitude_m == 2.0


def test_name_in_latin_1(of, plain):
    weather = of(epw_text(epw_rows(), city="M\u00fcnster"))
    assert weather.site.name == "M\u00fcnster"
    assert (weather.ghi == plain.ghi).all()


def test_name_of_a_tmy3_in_latin_1(of):
    made = Tmy3()
    made.head = made.head.replace("GREENSBORO", "GR\u00dcNBURG")
    assert of(made.text).site.name == "GR\u00dcNBURG PIEDMONT TRIAD INT NC"


def test_name_in_utf_8(of):
    assert of(epw_text(epw_rows(), city="M\u00fcnster").encode("utf-8")).site.name == "M\u00fcnster"


def test_byte_order_mark(of):
    assert of(epw_text(epw_rows()).encode("utf-8-sig")).format == "EPW"


@pytest.mark.parametrize(
    ("name", "read_as"), [("MIAMI BEACH", "Miami Beach FL"), ("MI\u00c5MI      ", "Mi\u00e5mi FL"), (" " * 11, "FL")]
)
def test_tmy2_name_that_is_not_one_plain_word(of, name, read_as):
    made, station = Tmy2(), open_weather("miami", base=Path())
    made.head = made.head.replace("MIAMI      ", name)
    weather = of(made.text)
    assert weather.site == replace(station.site, name=read_as)
    assert (weather.ghi == station.ghi).all()


# --- rows


def test_row_with_a_field_too_many(told):
    rows = epw_rows()
    rows[4000].append("7")
    (message,) = told(epw_text(rows))
    assert message.startswith("made.dat: looks like EPW but can't be read as such; got ParserError: ")
    assert "Expected 35 fields in line 4008, saw 36" in message  # 8 lines of header, one less for pvlib's own reading
    assert message.endswith("; open it in an editor: a header or a row is damaged or cut off")


def test_row_with_a_damaged_date(told):
    rows = epw_rows()
    rows[4000][1] = "Jx"
    (message,) = told(epw_text(rows))
    assert message.startswith("made.dat: looks like EPW but can't be read as such; got ValueError: time data \"2005Jx")


def test_row_of_a_tmy3_with_a_damaged_date(told):
    (message,) = told(Tmy3().set("date", hours=range(70, 71), value="01/03/19x8").text)
    assert message.startswith("made.dat: looks like TMY3 but can't be read as such; got ValueError: ")
    assert "'19x8'" in message


def test_row_of_a_tmy2_cut_short(told):
    made = Tmy2()
    made.rows[5] = made.rows[5][:40]
    (message,) = told(made.text)
    assert message.startswith("made.dat: looks like TMY2 but can't be read as such; got ValueError: ")
    assert "In made.dat Read value is not an integer" in message  # and no name of the copy that pvlib was given


def test_row_cut_short_is_filled_and_counted(of):
    rows = epw_rows()
    rows[4000] = rows[4000][: EPW["ghi"]]
    notices = of(epw_text(rows)).notices
    for column in ("ghi", "dni", "dhi", "wind", "cloud", "albedo"):
        assert f"{column}: 1 h missing, {FILLED}" in notices


def test_word_for_a_number_is_filled_and_counted(of, plain):
    weather = of(epw_text(set_epw(epw_rows(), "t_air", hours=range(NOON, NOON + 1), value="warm")))
    assert weather.notices == (f"t_air: 1 h missing, {FILLED}",)
    assert weather.t_air[NOON] == pytest.approx((plain.t_air[NOON - 1] + plain.t_air[NOON + 1]) / 2.0, abs=1e-9)


@pytest.mark.parametrize("made", ["EPW", "TMY3"])
def test_file_cut_off(told, made):
    if made == "EPW":
        text = epw_text(epw_rows()[:8000])
    else:
        tmy3 = Tmy3()
        tmy3.rows = tmy3.rows[:8000]
        text = tmy3.text
    assert told(text) == ["made.dat: not a whole year; got 8000 hourly rows, 760 of 8760 hours absent; allowed: 8760"]


def test_header_alone(told):
    assert told(epw_text([])) == [
        "made.dat: not a whole year; got 0 hourly rows, 8760 of 8760 hours absent; allowed: 8760"
    ]


def test_a_day_is_missing(told):
    (message,) = told(epw_text(epw_rows()[:-24]))
    assert message.startswith("made.dat, 2005-12-31 00:00: ghi is missing for 24 h in a row; ")


def test_single_rows_missing_are_filled_and_counted(of):
    rows = epw_rows()
    del rows[NOON], rows[100:102]
    weather = of(epw_text(rows))
    assert len(weather) == 8760
    assert weather.notices[0] == "3 rows are absent"
    assert f"ghi: 3 h missing, {FILLED}" in weather.notices


def test_hour_twice(told):
    rows = epw_rows()
    rows.insert(101, list(rows[100]))
    assert told(epw_text(rows)) == [  # row 100 is 5 January, 4 h
        (
            "made.dat, data row 102: an hour of the year stands twice; got 1 such hours, first at 2005-01-05 04:00:00; "
            "allowed: one row an hour"
        )
    ]


def test_hours_twice_in_a_tmy3(told):
    made = Tmy3()
    made.rows[30], made.rows[50] = list(made.rows[31]), list(made.rows[51])
    assert told(made.text) == [
        (
            "made.dat, data row 32: an hour of the year stands twice; got 2 such hours, first at 2006-01-02 08:00:00; "
            "allowed: one row an hour"
        )
    ]


def test_rows_out_of_order_are_sorted_and_told(of, plain):
    rows = epw_rows()
    rows[1000], rows[5000] = rows[5000], rows[1000]
    weather = of(epw_text(rows))
    assert weather.notices == ("rows were out of order and have been sorted",)
    assert (weather.ghi == plain.ghi).all()
    assert (weather.t_air == plain.t_air).all()


def test_tmy3_rows_out_of_order_keep_the_last_hour(of, greensboro):
    made = Tmy3()
    made.rows[-1], made.rows[1000] = made.rows[1000], made.rows[-1]
    weather = of(made.text)
    assert "rows were out of order and have been sorted" in weather.notices
    assert (weather.t_air == greensboro.t_air).all()


# --- gaps, limits, marks


def test_epw_marks_of_missing_values(of, plain):
    """Each column has its own gap of three hours, at noon of a day of its own."""
    rows, gaps = epw_rows(), {name: NOON + 24 * day for day, name in enumerate(COLUMNS)}
    for name, start in gaps.items():
        set_epw(rows, name, hours=range(start, start + 3), value=EPW_MISSING[name])
    weather = of(epw_text(rows))
    assert sorted(weather.notices) == sorted(f"{name}: 3 h missing, {FILLED}" for name in COLUMNS)
    for name, start in gaps.items():
        values, whole = getattr(weather, name), getattr(plain, name)
        before, after = whole[start - 1], whole[start + 3]
        line = [before + (after - before) * step / 4.0 for step in (1, 2, 3)]
        assert values[start : start + 3] == pytest.approx(line, rel=1e-12), name
        rest = np.delete(np.arange(8760), range(start, start + 3))
        assert (values[rest] == whole[rest]).all(), name


@pytest.mark.parametrize("name", ["ghi", "t_air", "wind"])
def test_gap_too_long(told, name):
    hours = range(NOON, NOON + 4)
    made = set_epw(epw_rows(), name, hours=hours, value=EPW_MISSING[name])
    assert told(epw_text(set_epw(made, name, hours=range(20, 21), value=EPW_MISSING[name]))) == [
        (
            f"made.dat, 2005-06-16 12:00: {name} is missing for 4 h in a row; got 5 h missing in 2 gaps; "
            "allowed: gaps up to 3 h, which are filled in a straight line and counted; mend the file or use another"
        )
    ]


@pytest.mark.parametrize("name", ["t_air", "wind"])
def test_column_missing_throughout(told, name):
    assert told(epw_text(set_epw(epw_rows(), name, hours=range(8760), value=EPW_MISSING[name]))) == [
        (
            f"made.dat, 2005-01-01 00:00: {name} is missing throughout; got 8760 h missing in 1 gaps; "
            "allowed: gaps up to 3 h, which are filled in a straight line and counted; mend the file or use another"
        )
    ]


@pytest.mark.parametrize("name", ["ghi", "dni", "dhi"])
def test_one_column_of_radiation_missing_throughout_is_made_by_closure(of, plain, name):
    weather = of(epw_text(set_epw(epw_rows(), name, hours=range(8760), value=EPW_MISSING[name])))
    assert weather.made == f"{name} by closure"
    assert weather.notices[0].startswith(f"the file has no {name.upper()}: made by closure, ")
    assert weather.stamp.found_min is None
    high = np.cos(np.radians(sun_position(plain).apparent_zenith_deg)) > 0.1
    assert getattr(weather, name)[high] == pytest.approx(getattr(plain, name)[high], abs=15.0)  # refraction


def test_radiation_missing_throughout(told):
    rows = epw_rows()
    for name in ("ghi", "dni"):
        set_epw(rows, name, hours=range(8760), value=EPW_MISSING[name])
    assert told(epw_text(rows)) == [
        (
            "made.dat: not enough radiation in the file; got DHI; allowed: GHI alone, or two of GHI, DNI and DHI, or all three; "
            "use a file that has them, or name their columns under [place.columns]"
        )
    ]


def test_column_that_a_tmy3_lacks(of):
    made = Tmy3()
    made.names[made.names.index("DNI (W/m^2)")] = "Something else"
    assert of(made.text).made == "dni by closure"


def test_optional_columns_with_a_long_gap_are_left_out_and_told(of):
    rows, names = epw_rows(), ("t_dew", "cloud", "longwave", "albedo")
    for name in names:
        set_epw(rows, name, hours=range(NOON, NOON + 4), value=EPW_MISSING[name])
    weather = of(epw_text(rows))
    assert [getattr(weather, name) for name in names] == [None] * 4
    assert weather.notices == tuple(
        f"{name}: 4 h missing or impossible, too many to fill: the column is not used" for name in names
    )


def test_optional_columns_missing_throughout_are_left_out(of):
    rows, names = epw_rows(), ("t_dew", "cloud", "longwave", "albedo")
    for name in names:
        set_epw(rows, name, hours=range(8760), value=EPW_MISSING[name])
    weather = of(epw_text(rows))
    assert [getattr(weather, name) for name in names] == [None] * 4


def test_pressure_missing_throughout(of):
    weather = of(epw_text(set_epw(epw_rows(), "pressure", hours=range(8760), value="999999")))
    assert weather.notices == ("no air pressure in the file: standard atmosphere at the site's altitude",)
    assert weather.pressure == pytest.approx(101325.0 * (1.0 - 2.25577e-5 * 100.0) ** 5.25588, rel=1e-4)  # ICAO, 100 m


def test_albedo_of_zero_is_no_albedo(of):
    assert of(epw_text(set_epw(epw_rows(), "albedo", hours=range(8760), value="0"))).albedo is None


WILD = {  # value in the file, the limits as told, the value as told (temperatures in C, as in the file)
    "ghi": ("1601", "-15 to 1600 W/m2", "1601"),
    "dni": ("-16", "-15 to 1500 W/m2", "-16"),
    "dhi": ("1201", "-15 to 1200 W/m2", "1201"),
    "t_air": ("-95.0", "-90 to 60 C", "-95"),
    "wind": ("76", "0 to 75 m/s", "76"),
    "longwave": ("39", "40 to 700 W/m2", "39"),
}


def test_values_outside_limits_are_missing(of, plain):
    rows = epw_rows()
    for name, (value, _, _) in WILD.items():
        set_epw(rows, name, hours=range(NOON, NOON + 2), value=value)
    weather = of(epw_text(rows))
    wanted = []
    for name, (_, limits, shown) in WILD.items():
        wanted.append(f"{name}: 2 h outside {limits} taken as missing (first {shown} at 2005-06-16 12:00)")
        wanted.append(f"{name}: 2 h missing, {FILLED}")
        before, after = getattr(plain, name)[[NOON - 1, NOON + 2]]
        line = [before + (after - before) * step / 3.0 for step in (1, 2)]
        assert getattr(weather, name)[NOON : NOON + 2] == pytest.approx(line, rel=1e-12), name
    assert weather.notices == tuple(wanted)


def test_values_outside_limits_for_long_are_refused(told):
    (message,) = told(epw_text(set_epw(epw_rows(), "wind", hours=range(NOON, NOON + 5), value="80")))
    assert message.startswith("made.dat, 2005-06-16 12:00: wind is missing for 5 h in a row; ")


def test_slightly_negative_irradiance(of):
    rows, names = epw_rows(), ("ghi", "dni", "dhi")
    for name in names:
        set_epw(rows, name, hours=range(3), value="-4.5")  # of the first night
    weather = of(epw_text(rows))
    assert weather.notices == tuple(f"{name}: 3 h slightly negative set to 0" for name in names)
    for name in names:
        assert getattr(weather, name)[:3].tolist() == [0.0, 0.0, 0.0]
        assert getattr(weather, name).min() == 0.0


def test_tmy3_marks_of_missing_values(of):
    made, names = Tmy3(), ("ghi", "dni", "dhi", "t_air", "t_dew", "wind")
    for name in names:
        made.set(name, hours=range(NOON, NOON + 3), value="-9900")
    notices = of(made.text).notices
    for name in names:
        assert f"{name}: 3 h missing, {FILLED}" in notices


def test_tmy3_gap_too_long(told):
    (message,) = told(Tmy3().set("wind", hours=range(NOON, NOON + 4), value="-9900").text)
    assert message.startswith(
        "made.dat, 2006-06-16 13:00: wind is missing for 4 h in a row; got 4 h missing in 1 gaps; "
    )


def test_tmy2_marks_of_missing_values(of):
    made = Tmy2()
    for name, mark in TMY2_MISSING.items():
        made.set(name, hours=range(NOON, NOON + 3), value=mark)
    notices = of(made.text).notices
    for name in TMY2_MISSING:
        assert f"{name}: 3 h missing, {FILLED}" in notices
    assert not any("outside" in notice for notice in notices)  # a mark is no value, however large


# --- stamps


@pytest.mark.parametrize(
    ("offset", "found"), [("0.0", -30.0), ("2.0", 90.0), ("1.5", 60.0), ("4.0", 210.0), ("-2.0", -150.0)]
)
def test_wrong_offset_is_found_and_put_right(of, plain, offset, found):
    weather = of(epw_text(epw_rows(), offset=offset))
    assert weather.stamp.rule_min == 30.0
    assert weather.stamp.found_min == weather.stamp.used_min == pytest.approx(found, abs=0.1)
    (notice,) = weather.notices
    assert notice.startswith(
        f"time stamps: the format's rule says +30 min to mid-hour, closure of GHI, DNI and DHI finds {found:+.1f} min (error "
    )
    assert notice.endswith(": the shift found is used; check the file's clock and UTC offset")
    off = (weather.time_mid - plain.time_mid) / np.timedelta64(1, "s")
    assert np.abs(off).max() < 6.0  # a tenth of a minute: the sun stands where it stood


def test_wrong_offset_of_a_real_year(of, greensboro):
    made = Tmy3()
    made.head = made.head.replace("-5.0", "-6.0")
    weather = of(made.text)
    assert weather.stamp.used_min == pytest.approx(greensboro.stamp.found_min - 60.0, abs=0.1)
    assert "finds -89.9 min" in weather.notices[-1]


@pytest.mark.parametrize("offset", ["1.05", "0.95"])
def test_offset_within_the_tolerance_keeps_the_rule(of, offset):
    weather = of(epw_text(epw_rows(), offset=offset))  # 3 min; a notice is due above 5
    assert weather.stamp.used_min == 30.0
    assert weather.stamp.found_min == pytest.approx(30.0 + 60.0 * (float(offset) - 1.0), abs=0.1)
    assert weather.notices == ()


def rolled(hours: int) -> list[list[str]]:
    """Our year with its radiation so many hours late."""
    rows = epw_rows()
    columns = slice(EPW["ghi"], EPW["dhi"] + 1)
    late = [row[columns] for row in rows[-hours:] + rows[:-hours]]
    for row, values in zip(rows, late, strict=True):
        row[columns] = values
    return rows


@pytest.mark.parametrize("hours", [4, -4])
def test_radiation_hours_off_is_put_right(of, hours):
    weather = of(epw_text(rolled(hours)))
    assert weather.stamp.used_min == pytest.approx(30.0 - 60.0 * hours, abs=1.0)  # the sun's way differs a little


@pytest.mark.parametrize(("hours", "end"), [(7, -300), (-7, 300)])
def test_shift_beyond_the_search_is_refused(told, hours, end):
    (message,) = told(epw_text(rolled(hours)))
    assert message.startswith("made.dat: time stamps: closure of GHI, DNI and DHI finds no time of day that fits; got ")
    assert f" W/m2, at {end:+d} min from the format's rule, where the search ends; " in message
    assert message.endswith(
        "; allowed: within 300 min of the format's rule; mend the header's UTC offset or longitude, "
        "or give them under [place]; check which columns are GHI, DNI and DHI"
    )


def test_columns_that_do_not_belong_together_are_told(of, plain):
    rows = epw_rows()
    for row in rows:
        row[EPW["dhi"]] = f"{2.0 * float(row[EPW['dhi']]) + 80.0 * (float(row[EPW['dni']]) > 0.0):.1f}"
    weather = of(epw_text(rows))
    assert weather.stamp.rmse_w_m2 > 60.0
    assert (weather.time_mid == plain.time_mid).all()
    (notice,) = weather.notices
    assert notice == (
        f"GHI, DNI and DHI do not belong together: GHI misses DHI + DNI cos z by {weather.stamp.rmse_w_m2:.0f} W/m2 rms "
        "over the hours with beam, and no shift of the clock mends it; check which columns they are, and their units"
    )


def test_too_little_beam_to_tell(of):
    rows = set_epw(epw_rows(), "dni", hours=range(8760), value="0")
    rows = set_epw(rows, "dni", hours=range(NOON, NOON + 5), value="300")
    weather = of(epw_text(rows))
    assert weather.notices == ("too little beam (5 h) to find the time-stamp convention: the format's rule is used",)
    assert (weather.stamp.found_min, weather.stamp.used_min, weather.stamp.rmse_w_m2) == (None, 30.0, None)


# --- the sky's columns


@pytest.mark.parametrize(
    ("gone", "model", "needs"),
    [
        (["t_dew"], "berdahl-martin", "dew point"),
        (["t_dew"], "brunt", "dew point"),
        (["cloud"], "martin-berdahl", "cloud cover"),
        (["t_dew", "cloud"], "martin-berdahl", "dew point and cloud cover"),
        (["longwave"], "measured", "long-wave irradiance"),
    ],
)
def test_sky_model_whose_column_is_missing(of, gone, model, needs):
    rows = epw_rows()
    for name in gone:
        set_epw(rows, name, hours=range(8760), value=EPW_MISSING[name])
    weather = of(epw_text(rows))
    with pytest.raises(InputError) as caught:
        sky_temperature(weather, solar_hour=sun_position(weather).solar_hour, model=model)
    left = [name for name in MODELS if not set(NEEDS.get(name, ())) & set(gone)]
    assert available_models(weather) == left
    assert str(caught.value) == (
        f"{weather.file}: sky model '{model}' needs {needs}, which the file does not have throughout; "
        f"allowed: {', '.join(left)}; choose another models.sky"
    )


def test_long_wave_column_is_not_in_a_tmy3(greensboro):
    with pytest.raises(
        InputError, match="sky model 'measured' needs long-wave irradiance, which the file does not have"
    ):
        sky_temperature(greensboro, solar_hour=np.zeros(8760), model="measured")


# --- calendars


def test_years_that_differ_month_by_month(of, plain):
    rows = [[str(1990 + 2 * int(row[1])), *row[1:]] for row in epw_rows()]
    weather = of(epw_text(rows))
    assert weather.source_years == tuple(range(1992, 2015, 2))
    assert weather.notices == ("rows come from 12 calendar years (1992-2014), put on one axis of 2006",)
    assert (weather.ghi == plain.ghi).all()
    assert (np.diff(weather.time_mid) == np.timedelta64(1, "h")).all()


def test_leap_year(of):
    weather = of(epw_text(epw_rows(year=2004)))
    assert len(weather) == 8784
    assert weather.notices == ()
    assert np.bincount(weather.month)[2] == 29 * 24
    local = pd.DatetimeIndex(weather.time_mid) + pd.Timedelta(hours=1)
    assert ((local.month == 2) & (local.day == 29)).sum() == 24
    assert weather.stamp.found_min == pytest.approx(30.0, abs=0.1)


def test_leap_day_among_rows_of_several_years(of):
    rows = [["2011" if row[1] == "7" else row[0], *row[1:]] for row in epw_rows(year=2004)]
    weather = of(epw_text(rows))
    assert len(weather) == 8784
    assert weather.notices == ("rows come from 2 calendar years (2004-2011), put on one axis of 2004",)


def test_leap_year_without_its_leap_day(of):
    rows = [row for row in epw_rows(year=2004) if row[1:3] != ["2", "29"]]
    weather = of(epw_text(rows))
    assert len(weather) == 8760
    assert weather.notices == ()
    local = pd.DatetimeIndex(weather.time_mid) + pd.Timedelta(hours=1)
    assert not ((local.month == 2) & (local.day == 29)).any()
    assert weather.stamp.found_min == pytest.approx(30.0, abs=0.1)


def test_leap_day_in_a_tmy3(of, greensboro):
    made, start = Tmy3(), hour_of_year(2, 28, 0)
    day = [["02/29/1996", *row[1:]] for row in made.rows[start : start + 24]]
    made.rows[start + 24 : start + 24] = day
    weather = of(made.text)
    assert len(weather) == 8784
    assert weather.notices[0].endswith(", put on one axis of 2004")
    assert (weather.t_air[start + 24 : start + 48] == greensboro.t_air[start : start + 24]).all()
    assert (np.delete(weather.t_air, range(start + 24, start + 48)) == greensboro.t_air).all()
    assert weather.stamp.used_min == -30.0


def test_leap_year_cut_off(told):
    assert told(epw_text(epw_rows(year=2004)[:8000])) == [
        "made.dat: not a whole year; got 8000 hourly rows, 784 of 8784 hours absent; allowed: 8784"
    ]
