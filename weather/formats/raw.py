"""What every reader gives back, and the small helpers that readers share."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
import pandas as pd
from scipy.constants import zero_Celsius

from weather.year import Floats, Site

__all__ = [
    "COLUMNS",
    "Convention",
    "Raw",
    "dew_point",
    "marked",
    "naive",
    "number",
    "numbers",
    "plain",
    "positive",
    "site_of",
]

COLUMNS = ("ghi", "dni", "dhi", "t_air", "wind", "t_dew", "cloud", "longwave", "albedo", "pressure")
Convention = Literal["start", "middle", "end"]


@dataclass(frozen=True, kw_only=True)
class Raw:
    """A file as its format's reader leaves it: SI columns with NaN for missing, rows as they stand.

    Parameters
    ----------
    format
        Name of the format, as a user would say it.
    stamp
        Which instant of its step a stamp marks.
    rule_min
        Minutes from a stamp to the middle of its step [min].
    site
        The place; NaN where the file has no number.
    index
        Stamps, in the site's standard time or in UTC.
    columns
        Of ``COLUMNS`` those that the file has.
    years
        Calendar years of the rows.
    utc
        Whether the stamps are UTC.
    step_min
        From row to row [min].
    said
        What the reader had to assume, a sentence each.
    """

    format: str
    stamp: Convention
    rule_min: float
    site: Site
    index: pd.DatetimeIndex
    columns: dict[str, Floats]
    years: tuple[int, ...]
    utc: bool = False
    step_min: float = 60.0
    said: tuple[str, ...] = ()


def plain(name: str) -> str:
    """Return a place's name without quotes and commas."""
    return name.replace(",", " ").replace('"', "").strip()


def site_of(name: str, latitude: str, longitude: str, *, altitude: str, offset: str) -> Site:
    """Place from a header's fields; NaN for what is no number.

    Parameters
    ----------
    name
        Of the place.
    latitude, longitude, altitude, offset
        As the file has them.

    Returns
    -------
    Site
        Not checked.
    """
    return Site(
        name=name,
        latitude_deg=number(latitude),
        longitude_deg=number(longitude),
        altitude_m=number(altitude),
        utc_offset_h=number(offset),
    )


def number(text: str) -> float:
    """Return a number, or NaN where there is none."""
    try:
        return float(text)
    except ValueError:
        return float("nan")


def naive(index: Any) -> pd.DatetimeIndex:
    """Return stamps as the clock shows them, without their zone."""
    return pd.DatetimeIndex(index).tz_localize(None)


def numbers(frame: pd.DataFrame, name: str) -> Floats:
    """Column as numbers, NaN where it has none or where it is marked with -9900 or less.

    Parameters
    ----------
    frame
        As read.
    name
        Of the column, which may be absent.

    Returns
    -------
    ndarray
        As long as the frame.
    """
    if name not in frame:
        return np.full(len(frame), np.nan)
    values = pd.to_numeric(frame[name], errors="coerce").to_numpy(dtype=float).copy()
    values[values <= -9900.0] = np.nan
    return np.asarray(values)


def marked(frame: pd.DataFrame, name: str, missing_from: float) -> Floats:
    """Column with the format's missing mark, and anything beyond it, as NaN.

    Parameters
    ----------
    frame
        As read.
    name
        Of the column.
    missing_from
        The mark.

    Returns
    -------
    ndarray
        As long as the frame.
    """
    values = numbers(frame, name)
    values[values >= missing_from] = np.nan
    return values


def positive(values: Floats) -> Floats:
    """Return the values, NaN for those that are not above zero."""
    return np.where(values > 0.0, values, np.nan)


def dew_point(t_air: Floats, humidity: Floats) -> Floats:
    """Dew point from relative humidity.

    Parameters
    ----------
    t_air
        ``(n,)`` [K].
    humidity
        Relative, over water, ``(n,)``, 0 to 1; NaN outside 0.005 to 1.1.

    Returns
    -------
    ndarray
        ``(n,)`` [K].

    Notes
    -----
    **Source**: Magnus form with the coefficients of WMO No. 8 (17.62, 243.12 C).
    """
    celsius = t_air - zero_Celsius
    known = np.where((humidity > 0.005) & (humidity <= 1.1), np.minimum(humidity, 1.0), np.nan)
    power = np.log(known) + 17.62 * celsius / (243.12 + celsius)
    return np.asarray(243.12 * power / (17.62 - power) + zero_Celsius)
