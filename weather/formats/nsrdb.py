"""The American satellite tables (NSRDB), hourly and finer, with their two header rows or without: values of an instant."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pandas as pd
from pvlib import iotools
from scipy.constants import zero_Celsius

from weather.formats.raw import Raw, dew_point, naive, number, numbers, plain, positive, site_of
from weather.hours import step_of
from weather.year import Floats, Site

__all__ = ["CLOCK", "read_nsrdb", "read_nsrdb_bare"]

CLOCK = ["Year", "Month", "Day", "Hour", "Minute"]


def read_nsrdb(text: str, path: Path) -> Raw:
    """An American satellite table with its two header rows.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.

    Returns
    -------
    Raw
        Stamps at the middle of the step, in the header's time zone.
    """
    names, values = list(csv.reader(text.splitlines()[:2]))
    head = dict(zip(names, values, strict=False))
    body = text.split("\n", 2)[2]
    plain_head = "Source,Latitude,Longitude,Time Zone,Elevation,Local Time Zone\nx,0,0,0,0,0"
    frame, _ = iotools.read_nsrdb_psm4(io.StringIO(f"{plain_head}\n{body}"), map_variables=False)
    zone, local = head.get("Time Zone", ""), head.get("Local Time Zone", "")
    utc = number(zone) == 0.0 and number(local) != 0.0
    name = " ".join(word for key in ("City", "State", "Country") if (word := plain(head.get(key, ""))) not in {"", "-"})
    site = site_of(
        name or f"{head.get('Source', '')} {head.get('Location ID', '')}".strip(),
        head.get("Latitude", ""),
        head.get("Longitude", ""),
        altitude=head.get("Elevation", ""),
        offset=local if utc else zone,
    )
    said = ("the file is in UTC; months go by the header's local time zone",) if utc else ()
    return _raw(frame, naive(frame.index), site=site, path=path, utc=utc, said=said)


def read_nsrdb_bare(text: str, path: Path) -> Raw:
    """The same table without header rows, whose place the scenario gives.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.

    Returns
    -------
    Raw
        Stamps at the middle of the step, in the standard time of ``[place]``.
    """
    frame = pd.read_csv(io.StringIO(text))
    index = pd.DatetimeIndex(pd.to_datetime(frame[CLOCK]))
    return _raw(frame, index, site=site_of(path.stem, "", "", altitude="", offset=""), path=path, utc=False, said=())


def _raw(
    frame: pd.DataFrame, index: pd.DatetimeIndex, *, site: Site, path: Path, utc: bool, said: tuple[str, ...]
) -> Raw:
    t_air = numbers(frame, "Temperature") + zero_Celsius
    columns = {
        "ghi": numbers(frame, "GHI"),
        "dni": numbers(frame, "DNI"),
        "dhi": numbers(frame, "DHI"),
        "t_air": t_air,
        "t_dew": _dew(frame, t_air),
        "wind": numbers(frame, "Wind Speed"),
        "albedo": positive(numbers(frame, "Surface Albedo")),
        "pressure": numbers(frame, "Pressure") * 100.0,
    }
    return Raw(
        format="American satellite table (NSRDB)" + ("" if site.latitude_deg == site.latitude_deg else ", bare"),
        stamp="middle",
        rule_min=0.0,
        site=site,
        index=index,
        columns=columns,
        years=tuple(sorted({int(year) for year in index.year})),
        utc=utc,
        step_min=step_of(index, file=str(path)),
        said=said,
    )


def _dew(frame: pd.DataFrame, t_air: Floats) -> Floats:
    given = numbers(frame, "Dew Point") + zero_Celsius
    return given if np.isfinite(given).any() else dew_point(t_air, numbers(frame, "Relative Humidity") / 100.0)
