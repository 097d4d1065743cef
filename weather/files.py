"""Weather files: a reader for each format, and from its rows one checked year."""

from __future__ import annotations

import codecs
import warnings
from collections.abc import Callable, Mapping
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from pvlib.atmosphere import alt2pres

from weather.axis import axis_of, on_axis, one_year, runs
from weather.checks import clean_column, find_stamp, site_problems
from weather.closure import RADIATION, suspicions
from weather.components import completed
from weather.errors import InputError, Problem
from weather.evidence import Evidence
from weather.findings import Finding
from weather.formats.known import ALLOWED, recognise
from weather.formats.raw import Raw
from weather.formats.table import Columns, read_table_of
from weather.hours import hourly
from weather.quality import findings_of
from weather.sun import Sun, sun_at
from weather.units import unit_findings
from weather.year import Floats, Gap, Site, Stamp, WeatherYear

__all__ = ["read"]

REQUIRED = (*RADIATION, "t_air", "wind")
OPTIONAL = ("t_dew", "cloud", "longwave", "albedo")
PLACE = ("latitude_deg", "longitude_deg", "altitude_m", "utc_offset_h")


def read(
    path: Path,
    *,
    place: Mapping[str, float] | None = None,
    columns: Columns | None = None,
    decomposition: str = "erbs",
    year: int | None = None,
) -> WeatherYear:
    """Read a weather file of the user's.

    Parameters
    ----------
    path
        A file of one of the formats of ``weather.formats.known``; which one is found from its content.
    place
        ``latitude_deg``, ``longitude_deg``, ``altitude_m``, ``utc_offset_h`` that take the place of the file's own.
    columns
        Names and units of the columns, of a table in no known format.
    decomposition
        A key of ``weather.components.DECOMPOSITIONS``, for a file with GHI alone.
    year
        Which calendar year to take, of a file with several.

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
    name, reader = _reader(text, columns=columns, place=place or {}, file=str(path))
    try:
        with warnings.catch_warnings():
            warnings.simplefilter(
                "ignore"
            )  # a library's warnings about a damaged file come out as this file's own message
            raw = reader(text, path)
        raw = hourly(raw if year is None else one_year(raw, year=year, file=str(path)), file=str(path))
    except InputError:
        raise
    except Exception as fault:  # noqa: BLE001 # whatever a reader trips over, the user gets a message and never a traceback
        do = "open it in an editor: a header or a row is damaged or cut off"
        raise InputError(
            Problem(where=str(path), what=f"looks like {name} but can't be read as such", got=_first_line(fault), do=do)
        ) from None
    if place:
        said = _stand_ins(place, site=raw.site)
        raw = replace(raw, site=replace(raw.site, **place))  # type: ignore[arg-type] # never the name
    if faults := site_problems(raw.site, file=str(path)):
        raise InputError(faults)
    return _checked(raw, file=str(path), said=said if place else [], decomposition=decomposition)


def _reader(
    text: str, *, columns: Columns | None, place: Mapping[str, float], file: str
) -> tuple[str, Callable[[str, Path], Raw]]:
    """Name and reader of the format that the content shows, or of the table that is described."""
    if columns is not None:
        return "the table that [place.columns] describes", partial(
            read_table_of, columns=columns, utc_offset_h=place.get("utc_offset_h", np.nan)
        )
    known = recognise(text, file=file)
    return known.name, known.read


def _stand_ins(place: Mapping[str, float], *, site: Site) -> list[str]:
    """What of the place is the scenario's, one sentence a value; one for all where the file has none at all."""
    if all(np.isnan(getattr(site, key)) for key in PLACE) and len(place) == len(PLACE):
        return ["the file carries no place: it is the one given under [place]"]
    return [_stands_in(key, own=getattr(site, key)) for key in place]


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
        raise InputError(Problem(where=str(path), what=what, allowed=f"a text file: {ALLOWED}"))
    data = data.removeprefix(codecs.BOM_UTF8)
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError:
        return data.decode("latin-1")


def _first_line(fault: Exception) -> str:
    return f"{type(fault).__name__}: {str(fault).splitlines()[0] if str(fault) else ''}"[:160]


def _checked(raw: Raw, *, file: str, said: list[str], decomposition: str) -> WeatherYear:
    index, order, notices = axis_of(raw.index, at_end=raw.stamp == "end", file=file)
    said += [*raw.said, *notices]
    years = round(len(index) / 8766.0)
    if len(raw.years) > years:
        span = f"{raw.years[0]}-{raw.years[-1]}"
        said.append(f"rows come from {len(raw.years)} calendar years ({span}), put on one axis of {index[0].year}")
    columns = {name: on_axis(values, order=order, size=len(index)) for name, values in raw.columns.items()}
    utc = index if raw.utc else index - pd.Timedelta(hours=raw.site.utc_offset_h)
    at_rule = _instants(utc, shift_min=raw.rule_min)
    sun = sun_at(at_rule, site=raw.site)
    radiation, made, notices = completed(columns, sun=sun, time=at_rule, model=decomposition, file=file)
    said += notices
    lacking = frozenset(radiation) - {name for name in radiation if np.isfinite(columns.get(name, np.nan)).any()}
    known = {name: values for name, values in (columns | radiation).items() if np.isfinite(values).any()}
    evidence = Evidence(columns=known, made=lacking, sun=sun, site=raw.site, stamps=index)
    whole, notices = _mended(columns | radiation, evidence=evidence, file=file)
    said += notices
    pressure, notices = _pressure(columns.get("pressure"), site=raw.site)
    said += notices
    light = {name: values for name in RADIATION if (values := whole[name]) is not None}
    stamp, notices, suspected = _stamp_of(raw, light, made=made, sun=sun, file=file)
    said += notices
    time_mid = _instants(utc, shift_min=stamp.used_min)
    shift = stamp.used_min + 60.0 * (raw.site.utc_offset_h if raw.utc else 0.0)
    local = pd.DatetimeIndex(_instants(index, shift_min=shift))
    if stamp.used_min != raw.rule_min:
        evidence = replace(evidence, sun=sun_at(time_mid, site=raw.site))
    return WeatherYear(
        site=raw.site,
        file=file,
        format=raw.format,
        stamp=stamp,
        time_mid=time_mid,
        month=local.month.to_numpy().astype(np.int64),
        pressure=pressure,
        source_years=raw.years,
        notices=tuple(said),
        findings=findings_of(evidence, suspected=suspected, stamp=stamp),
        gaps=_gaps(known, index=index),
        step_min=raw.step_min,
        made=made,
        **whole,  # type: ignore[arg-type] # required columns are never None here
    )


def _mended(
    columns: Mapping[str, Floats], *, evidence: Evidence, file: str
) -> tuple[dict[str, Floats | None], list[str]]:
    """Every column made whole; where one can't be, because it is in another unit, that is said instead."""
    whole: dict[str, Floats | None] = {}
    said: list[str] = []
    try:
        for name in REQUIRED:
            values = columns.get(name, np.full(len(evidence.stamps), np.nan))
            column = clean_column(name, values=values, file=file, stamps=evidence.stamps)
            whole[name] = column.values
            said += column.notices
    except InputError:
        if units := list(unit_findings(evidence)):
            raise InputError([each.problem(file=file, accept=False) for each in units]) from None
        raise
    for name in OPTIONAL:
        whole[name], notices = _if_complete(name, columns.get(name), file=file, stamps=evidence.stamps)
        said += notices
    return whole, said


def _stamp_of(
    raw: Raw, light: dict[str, Floats], *, made: str | None, sun: Sun, file: str
) -> tuple[Stamp, list[str], list[Finding]]:
    """The shift of the stamps, what is said of it, and other readings of the file that fit far better."""
    rule, latitude = raw.rule_min, raw.site.latitude_deg
    if made is not None:
        return Stamp(rule_min=rule, found_min=None, used_min=rule, rmse_w_m2=None, rmse_unshifted_w_m2=None), [], []
    try:
        stamp, notice = find_stamp(sun, latitude_deg=latitude, rule_min=rule, file=file, **light)
    except InputError:
        if others := suspicions(sun, latitude_deg=latitude, columns=light, best=None):
            raise InputError([each.problem(file=file, accept=False) for each in others]) from None
        raise
    found = suspicions(sun, latitude_deg=latitude, columns=light, best=stamp.rmse_w_m2 or 0.0)
    return stamp, [notice] if notice else [], found


def _gaps(columns: Mapping[str, Floats], *, index: pd.DatetimeIndex) -> tuple[Gap, ...]:
    """What was missing from columns that the file has."""
    return tuple(
        Gap(name, str(index[first])[:16], hours)
        for name, values in columns.items()
        for first, hours in runs(~np.isfinite(values))
    )


def _instants(index: pd.DatetimeIndex, *, shift_min: float) -> np.ndarray[Any, np.dtype[np.datetime64]]:
    return (index + pd.Timedelta(seconds=round(60.0 * shift_min))).to_numpy().astype("datetime64[s]")


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
