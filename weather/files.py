"""Weather files: one reader a format, all through pvlib, into one checked year."""

from __future__ import annotations

import codecs
import csv
import io
import tempfile
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from pvlib import iotools
from pvlib.atmosphere import alt2pres
from scipy.constants import zero_Celsius

from weather.checks import clean_column, find_stamp, site_problems
from weather.errors import InputError, Problem
from weather.sun import sun_at
from weather.year import Floats, Site, WeatherYear

__all__ = ["read"]

PLAIN_YEAR, LEAP_YEAR = (
    2006,
    2004,
)  # calendar for rows that come from several years: the middle of the leap cycle, or a leap year
REQUIRED = ("ghi", "dni", "dhi", "t_air", "wind")
OPTIONAL = ("t_dew", "cloud", "longwave", "albedo")


@dataclass(frozen=True, kw_only=True)
class Raw:
    """A file as its format's reader leaves it: SI columns with NaN for missing, rows as they stand."""

    format: str
    rule_min: float
    site: Site
    index: pd.DatetimeIndex
    columns: dict[str, Floats]
    years: tuple[int, ...]


def read(path: Path, *, place: Mapping[str, float] | None = None) -> WeatherYear:
    """Read a weather file of the user's.

    Parameters
    ----------
    path
        A TMY3, TMY2 or EPW file; which one is found from its content.
    place
        ``latitude_deg``, ``longitude_deg``, ``altitude_m``, ``utc_offset_h`` that take the place of the file's own.

    Returns
    -------
    WeatherYear
        Complete and checked.

    Raises
    ------
    InputError
        The file can't be read, is not a year, or lacks what a year needs.
    """
    text = _text(path)
    name, reader = _recognise(text, file=str(path))
    try:
        raw = reader(text, path)
    except InputError:
        raise
    except Exception as fault:  # noqa: BLE001 # whatever a reader trips over, the user gets a message and never a traceback
        do = "open it in an editor: a header or a row is damaged or cut off"
        raise InputError(
            Problem(where=str(path), what=f"looks like {name} but can't be read as such", got=_first_line(fault), do=do)
        ) from None
    if place:
        said = [_stands_in(key, own=getattr(raw.site, key)) for key in place]
        raw = replace(raw, site=replace(raw.site, **place))  # type: ignore[arg-type] # never the name
    if faults := site_problems(raw.site, file=str(path)):
        raise InputError(faults)
    return _checked(raw, file=str(path), said=said if place else [])


def _stands_in(key: str, *, own: float) -> str:
    return f"{key} as given under [place]" + ("; the file has none" if np.isnan(own) else ", not as in the file")


def _text(path: Path) -> str:
    try:
        data = path.read_bytes()
    except (OSError, ValueError) as fault:  # a value error is a path that no system takes
        do = "check the path (it counts from the scenario file), or name a bundled station"
        what = f"weather file cannot be read: {getattr(fault, 'strerror', fault)}"
        raise InputError(Problem(where=str(path), what=what, do=do)) from None
    if b"\0" in data[:4096] or not data.strip():
        what = "weather file is empty" if not data.strip() else "weather file is binary, not text"
        raise InputError(Problem(where=str(path), what=what, allowed="a TMY3, TMY2 or EPW text file"))
    data = data.removeprefix(codecs.BOM_UTF8)
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError:
        return data.decode("latin-1")


def _first_line(fault: Exception) -> str:
    return f"{type(fault).__name__}: {str(fault).splitlines()[0] if str(fault) else ''}"[:160]


def _recognise(text: str, *, file: str) -> tuple[str, Callable[[str, Path], Raw]]:
    first, _, rest = text.partition("\n")
    second = rest.partition("\n")[0]
    if first.upper().startswith("LOCATION,"):
        return "EPW", _epw
    if second.startswith("Date (MM/DD/YYYY)"):
        return "TMY3", _tmy3
    if len(second) >= 140 and second[1:9].replace(" ", "0").isdigit() and "," not in second:
        return "TMY2", _tmy2
    raise InputError(
        Problem(
            where=f"{file}:1", what="weather file of unknown format", got=repr(first[:60]), allowed="TMY3, TMY2 or EPW"
        )
    )


def _tmy3(text: str, path: Path) -> Raw:
    head, _, body = text.partition("\n")
    fields = next(csv.reader([head]))
    if len(fields) != 7:
        what = "TMY3 header needs seven fields: code, name, state, UTC offset, latitude, longitude, altitude"
        raise InputError(Problem(where=f"{path}:1", what=what, got=repr(head.strip()), do="mend the first line"))
    years = {int(line[6:10]) for line in body.splitlines()[1:] if line.strip()}
    plain = "0,name,state,0,0,0,0"  # the place is read here, where a blank is no fault yet
    frame, _ = iotools.read_tmy3(io.StringIO(f"{plain}\n{body}"))
    source = "Alb source" if "Alb source" in frame else None
    albedo = _numbers(frame, "albedo")
    if source:
        albedo = np.where(frame[source].astype(str).str.strip().eq("?"), np.nan, albedo)
    columns = {
        "ghi": _numbers(frame, "ghi"),
        "dni": _numbers(frame, "dni"),
        "dhi": _numbers(frame, "dhi"),
        "t_air": _numbers(frame, "temp_air") + zero_Celsius,
        "t_dew": _numbers(frame, "temp_dew") + zero_Celsius,
        "wind": _numbers(frame, "wind_speed"),
        "cloud": _numbers(frame, "OpqCld (tenths)") / 10.0,
        "albedo": np.where(albedo > 0.0, albedo, np.nan),
        "pressure": _numbers(frame, "pressure") * 100.0,
    }
    _, name, state, offset, latitude, longitude, altitude = fields
    return Raw(
        format="TMY3",
        rule_min=-30.0,
        site=_site(f"{_plain(name)} {_plain(state)}".strip(), latitude, longitude, altitude=altitude, offset=offset),
        index=_tmy3_index(frame),
        columns=columns,
        years=tuple(sorted(years)),
    )


def _tmy3_index(frame: pd.DataFrame) -> pd.DatetimeIndex:
    """Stamps on one calendar year, a leap year where a 29 February is among them, which pvlib would move to 1 March."""
    date = frame["Date (MM/DD/YYYY)"].astype(str).str.split("/")
    clock = frame["Time (HH:MM)"].astype(str).str.split(":")
    month, day = date.str[0].astype(int), date.str[1].astype(int)
    year = LEAP_YEAR if ((month == 2) & (day == 29)).any() else PLAIN_YEAR
    midnight = pd.to_datetime(pd.DataFrame({"year": year, "month": month, "day": day}))
    minutes = 60 * clock.str[0].astype(int) + clock.str[1].astype(int)
    return pd.DatetimeIndex(midnight + pd.to_timedelta(minutes, unit="min"))


def _tmy2(text: str, path: Path) -> Raw:
    head, _, body = text.partition("\n")
    frame = _tmy2_rows(body, name=path.name)
    columns = {
        "ghi": _marked(frame, "GHI", 9999),
        "dni": _marked(frame, "DNI", 9999),
        "dhi": _marked(frame, "DHI", 9999),
        "t_air": _marked(frame, "DryBulb", 9999) / 10.0 + zero_Celsius,
        "t_dew": _marked(frame, "DewPoint", 9999) / 10.0 + zero_Celsius,
        "wind": _marked(frame, "Wspd", 999) / 10.0,
        "cloud": _marked(frame, "OpqCld", 99) / 10.0,
        "pressure": _marked(frame, "Pressure", 9999) * 100.0,
    }
    years = tuple(sorted({1900 + int(year) % 100 for year in frame["year"]}))
    return Raw(
        format="TMY2", rule_min=30.0, site=_tmy2_site(head), index=_naive(frame.index), columns=columns, years=years
    )


def _tmy2_rows(body: str, *, name: str) -> pd.DataFrame:
    """Rows as pvlib reads them, from a copy in ASCII: it takes a path alone, and a place's name of one word alone."""
    with tempfile.TemporaryDirectory() as folder:
        copy = Path(folder) / "copy.tm2"
        plain = " 00000 NAME                   XX   0 N  0  0 E   0  0     0"
        copy.write_text(f"{plain}\n{body}", encoding="ascii", errors="replace")
        try:
            frame, _ = iotools.read_tmy2(str(copy))
        except ValueError as fault:
            raise ValueError(str(fault).replace(str(copy), name)) from None
    return frame  # type: ignore[no-any-return] # pvlib ships no types


def _tmy2_site(head: str) -> Site:
    """Place by the columns of the TMY2 manual, in which names of several words fit."""
    return _site(
        f"{head[7:29].strip().title()} {head[30:32].strip()}".strip(),
        _degrees(head[37:44], sides="NS"),
        _degrees(head[45:53], sides="EW"),
        altitude=head[55:59],
        offset=head[33:36],
    )


def _degrees(field: str, *, sides: str) -> str:
    """Such as "W  80 16" in decimal degrees, negative on the second side; empty if it is not like that."""
    side, words = field[:1], field[1:].split()
    if side not in sides or len(words) != 2:
        return ""
    return str((_number(words[0]) + _number(words[1]) / 60.0) * (1.0 if side == sides[0] else -1.0))


def _epw(text: str, path: Path) -> Raw:
    head = next(csv.reader([text.partition("\n")[0]]))
    if len(head) != 10:
        what = "EPW header LOCATION needs ten fields; a comma in the place's name shifts the others"
        raise InputError(
            Problem(where=f"{path}:1", what=what, got=f"{len(head)} fields: {','.join(head)}", do="mend the first line")
        )
    plain = "LOCATION,city,-,-,-,0,0,0,0,0"  # the place is read here, where a blank is no fault yet
    frame, _ = iotools.read_epw(io.StringIO(f"{plain}\n" + text.partition("\n")[2]))
    columns = {
        "ghi": _marked(frame, "ghi", 9999),
        "dni": _marked(frame, "dni", 9999),
        "dhi": _marked(frame, "dhi", 9999),
        "t_air": _marked(frame, "temp_air", 99.9) + zero_Celsius,
        "t_dew": _marked(frame, "temp_dew", 99.9) + zero_Celsius,
        "wind": _marked(frame, "wind_speed", 999),
        "cloud": _marked(frame, "opaque_sky_cover", 99) / 10.0,
        "longwave": _marked(frame, "ghi_infrared", 9999),
        "albedo": _positive(_marked(frame, "albedo", 999)),
        "pressure": _marked(frame, "atmospheric_pressure", 999999),
    }
    index = _naive(frame.index)
    years = tuple(sorted({int(year) for year in index.year}))
    latitude, longitude, offset, altitude = head[6:]
    site = _site(_plain(head[1]), latitude, longitude, altitude=altitude, offset=offset)
    return Raw(format="EPW", rule_min=30.0, site=site, index=index, columns=columns, years=years)


def _plain(name: str) -> str:
    return name.replace(",", " ").replace('"', "").strip()


def _site(name: str, latitude: str, longitude: str, *, altitude: str, offset: str) -> Site:
    return Site(
        name=name,
        latitude_deg=_number(latitude),
        longitude_deg=_number(longitude),
        altitude_m=_number(altitude),
        utc_offset_h=_number(offset),
    )


def _number(text: str) -> float:
    try:
        return float(text)
    except ValueError:
        return float("nan")


def _naive(index: Any) -> pd.DatetimeIndex:
    return pd.DatetimeIndex(index).tz_localize(None)


def _numbers(frame: pd.DataFrame, name: str) -> Floats:
    if name not in frame:
        return np.full(len(frame), np.nan)
    values = pd.to_numeric(frame[name], errors="coerce").to_numpy(dtype=float).copy()
    values[values <= -9900.0] = np.nan
    return np.asarray(values)


def _marked(frame: pd.DataFrame, name: str, missing_from: float) -> Floats:
    """Column with the format's missing mark, and anything beyond it, as NaN."""
    values = _numbers(frame, name)
    values[values >= missing_from] = np.nan
    return values


def _positive(values: Floats) -> Floats:
    return np.where(values > 0.0, values, np.nan)


def _checked(raw: Raw, *, file: str, said: list[str]) -> WeatherYear:
    index, order, notices = _calendar(raw.index, at_end=raw.rule_min < 0.0, file=file)
    said += notices
    if len(raw.years) > 1:
        span = f"{raw.years[0]}-{raw.years[-1]}"
        said.append(f"rows come from {len(raw.years)} calendar years ({span}), put on one axis of {index[0].year}")
    columns = {name: _on_axis(values, order=order, size=len(index)) for name, values in raw.columns.items()}
    whole: dict[str, Floats | None] = {}
    for name in REQUIRED:
        column = clean_column(name, values=columns[name], file=file, stamps=index)
        whole[name] = column.values
        said += column.notices
    for name in OPTIONAL:
        whole[name], notices = _if_complete(name, columns.get(name), file=file, stamps=index)
        said += notices
    pressure, notices = _pressure(columns.get("pressure"), site=raw.site)
    said += notices
    utc = index - pd.Timedelta(hours=raw.site.utc_offset_h)
    radiation = {name: values for name in ("ghi", "dni", "dhi") if (values := whole[name]) is not None}
    at_rule = _instants(utc, shift_min=raw.rule_min)
    sun = sun_at(at_rule, site=raw.site)
    stamp, notice = find_stamp(sun, latitude_deg=raw.site.latitude_deg, rule_min=raw.rule_min, file=file, **radiation)
    time_mid = _instants(utc, shift_min=stamp.used_min)
    local = pd.DatetimeIndex(_instants(index, shift_min=stamp.used_min))
    return WeatherYear(
        site=raw.site,
        file=file,
        format=raw.format,
        stamp=stamp,
        time_mid=time_mid,
        month=local.month.to_numpy().astype(np.int64),
        pressure=pressure,
        source_years=raw.years,
        notices=tuple([*said, notice] if notice else said),
        **whole,  # type: ignore[arg-type] # required columns are never None here
    )


def _instants(index: pd.DatetimeIndex, *, shift_min: float) -> np.ndarray[Any, np.dtype[np.datetime64]]:
    return (index + pd.Timedelta(seconds=round(60.0 * shift_min))).to_numpy().astype("datetime64[s]")


def _calendar(
    index: pd.DatetimeIndex, *, at_end: bool, file: str
) -> tuple[pd.DatetimeIndex, np.ndarray[Any, Any], list[str]]:
    """One hourly axis in the file's own stamps, and the place of each row on it."""
    lag = pd.Timedelta(hours=1 if at_end else 0)
    start = index - lag
    leap_day = bool(((start.month == 2) & (start.day == 29)).any())
    single = start.year.nunique() == 1
    year = int(start.year[0]) if single else (LEAP_YEAR if leap_day else PLAIN_YEAR)
    axis = pd.date_range(f"{year}-01-01", f"{year}-12-31 23:00", freq="h")
    if not leap_day:
        axis = axis[~((axis.month == 2) & (axis.day == 29))]
    parts = pd.DataFrame({"year": year, "month": start.month, "day": start.day, "hour": start.hour})
    place = axis.get_indexer(pd.DatetimeIndex(pd.to_datetime(parts)))
    return axis + lag, place, _axis_faults(place, size=len(axis), file=file, index=index)


def _axis_faults(place: np.ndarray[Any, Any], *, size: int, file: str, index: pd.DatetimeIndex) -> list[str]:
    """Refuse what is not one row an hour of one year; count what is out of order or missing."""
    unique, counts = np.unique(place, return_counts=True)
    if (counts > 1).any():
        row = int(np.flatnonzero(place == unique[counts > 1][0])[1])
        what, got = (
            "an hour of the year stands twice",
            f"{np.count_nonzero(counts > 1)} such hours, first at {index[row]}",
        )
        raise InputError(Problem(where=f"{file}, data row {row + 1}", what=what, got=got, allowed="one row an hour"))
    absent = size - len(unique)
    if absent > size // 100:
        raise InputError(
            Problem(
                where=file,
                what="not a whole year",
                got=f"{len(place)} hourly rows, {absent} of {size} hours absent",
                allowed=f"{size}",
            )
        )
    said = [f"{absent} rows are absent"] if absent else []
    if (np.diff(place) < 0).any():
        said.append("rows were out of order and have been sorted")
    return said


def _on_axis(values: Floats, *, order: np.ndarray[Any, Any], size: int) -> Floats:
    placed = np.full(size, np.nan)
    placed[order] = values
    return placed


def _if_complete(
    name: str, values: Floats | None, *, file: str, stamps: pd.DatetimeIndex
) -> tuple[Floats | None, list[str]]:
    """Column made whole, or None where too much of it is missing."""
    if values is None or not np.isfinite(values).any():
        return None, []
    try:
        column = clean_column(name, values=values, file=file, stamps=stamps)
    except InputError:
        return None, [
            f"{name}: {np.count_nonzero(~np.isfinite(values))} h missing or impossible, too many to fill: the column is not used"
        ]
    return column.values, list(column.notices)


def _pressure(values: Floats | None, *, site: Site) -> tuple[float, list[str]]:
    known = values[(values > 40e3) & (values < 110e3)] if values is not None else np.array([])
    if known.size:
        return float(known.mean()), []
    return float(alt2pres(site.altitude_m)), ["no air pressure in the file: standard atmosphere at the site's altitude"]
