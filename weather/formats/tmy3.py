"""TMY3: an hour's row is stamped at its end; two header rows; source flags beside the values."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pandas as pd
from pvlib import iotools
from scipy.constants import zero_Celsius

from weather.errors import InputError, Problem
from weather.formats.raw import Raw, numbers, plain, site_of

__all__ = ["LEAP_YEAR", "PLAIN_YEAR", "read_tmy3"]

# calendar for rows that come from several years: the middle of the leap cycle, or a leap year
PLAIN_YEAR, LEAP_YEAR = 2006, 2004


def read_tmy3(text: str, path: Path) -> Raw:
    """A TMY3 file.

    Parameters
    ----------
    text
        The file's content.
    path
        For messages.

    Returns
    -------
    Raw
        Stamps at the end of the hour, on one calendar year.

    Raises
    ------
    InputError
        The first line does not have its seven fields.
    """
    head, _, body = text.partition("\n")
    fields = next(csv.reader([head]))
    if len(fields) != 7:
        what = "TMY3 header needs seven fields: code, name, state, UTC offset, latitude, longitude, altitude"
        raise InputError(Problem(where=f"{path}:1", what=what, got=repr(head.strip()), do="mend the first line"))
    years = {int(line[6:10]) for line in body.splitlines()[1:] if line.strip()}
    header = "0,name,state,0,0,0,0"  # the place is read here, where a blank is no fault yet
    frame, _ = iotools.read_tmy3(io.StringIO(f"{header}\n{body}"))
    source = "Alb source" if "Alb source" in frame else None
    albedo = numbers(frame, "albedo")
    if source:
        albedo = np.where(frame[source].astype(str).str.strip().eq("?"), np.nan, albedo)
    columns = {
        "ghi": numbers(frame, "ghi"),
        "dni": numbers(frame, "dni"),
        "dhi": numbers(frame, "dhi"),
        "t_air": numbers(frame, "temp_air") + zero_Celsius,
        "t_dew": numbers(frame, "temp_dew") + zero_Celsius,
        "wind": numbers(frame, "wind_speed"),
        "cloud": numbers(frame, "OpqCld (tenths)") / 10.0,
        "albedo": np.where(albedo > 0.0, albedo, np.nan),
        "pressure": numbers(frame, "pressure") * 100.0,
    }
    _, name, state, offset, latitude, longitude, altitude = fields
    return Raw(
        format="TMY3",
        stamp="end",
        rule_min=-30.0,
        site=site_of(f"{plain(name)} {plain(state)}".strip(), latitude, longitude, altitude=altitude, offset=offset),
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
