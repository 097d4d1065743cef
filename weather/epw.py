"""A year written as an EPW file, which says in its header what it is."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from scipy.constants import zero_Celsius

from weather.sky import magnus_vapour_pressure
from weather.sun import sun_position
from weather.year import Floats, WeatherYear

__all__ = ["epw_text"]

MISSING = {"longwave": 9999.0, "cloud": 99.0, "albedo": 999.0, "t_dew": 99.9, "humidity": 999.0}


def epw_text(year: WeatherYear, *, comments: Sequence[str]) -> str:
    """EPW file of a year by the local clock, one row an hour, the hour's end in the stamp.

    Parameters
    ----------
    year
        8760 h of one calendar year, from its first hour.
    comments
        What the year is; two lines, commas in them become semicolons.

    Returns
    -------
    str
        With a line end.

    Notes
    -----
    **Source**: the format's data dictionary, from memory; field by field what ``weather.files`` and pvlib read.
    """
    site = year.site
    first, second = (" ".join(line.split()).replace(",", ";") for line in comments)
    place = f"{site.latitude_deg:.4f},{site.longitude_deg:.4f},{site.utc_offset_h:g},{site.altitude_m:.1f}"
    head = [
        f"LOCATION,{_plain(site.name)},-,-,{year.format},-,{place}",
        "DESIGN CONDITIONS,0",
        "TYPICAL/EXTREME PERIODS,0",
        "GROUND TEMPERATURES,0",
        "HOLIDAYS/DAYLIGHT SAVINGS,No,0,0,0",
        f"COMMENTS 1,{first}",
        f"COMMENTS 2,{second}",
        "DATA PERIODS,1,1,Data,Sunday,1/1,12/31",
    ]
    return "\n".join([*head, *_rows(year)]) + "\n"


def _plain(name: str) -> str:
    return " ".join(name.replace(",", " ").replace('"', "").split())


def _rows(year: WeatherYear) -> list[str]:
    offset = np.timedelta64(round(3600.0 * year.site.utc_offset_h - 60.0 * year.stamp.used_min), "s")
    stamps = [str(start) for start in year.time_mid + offset]
    columns = [column.tolist() for column in _columns(year)]
    return [_row(stamp, *values) for stamp, *values in zip(stamps, *columns, strict=True)]


def _columns(year: WeatherYear) -> list[Floats]:
    """Numbers of a row in the format's order, those left out between them."""
    sun = sun_position(year)
    normal = np.where(sun.apparent_zenith_deg < 90.0, sun.dni_extra, 0.0)
    t_dew = year.t_dew
    humidity = None
    if t_dew is not None:
        humidity = 100.0 * magnus_vapour_pressure(t_dew) / magnus_vapour_pressure(year.t_air)
    cloud = None if year.cloud is None else 10.0 * year.cloud
    return [
        year.t_air - zero_Celsius,
        _or_missing("t_dew", None if t_dew is None else t_dew - zero_Celsius, year=year),
        _or_missing("humidity", humidity, year=year),
        np.full(len(year), year.pressure),
        normal * np.maximum(np.cos(np.radians(sun.apparent_zenith_deg)), 0.0),
        normal,
        _or_missing("longwave", year.longwave, year=year),
        year.ghi,
        year.dni,
        year.dhi,
        year.wind,
        _or_missing("cloud", cloud, year=year),
        _or_missing("albedo", year.albedo, year=year),
    ]


def _or_missing(name: str, values: Floats | None, *, year: WeatherYear) -> Floats:
    return np.full(len(year), MISSING[name]) if values is None else values


def _row(stamp: str, *numbers: float) -> str:
    air, dew, humidity, pressure, top, normal, longwave, ghi, dni, dhi, wind, cloud, albedo = numbers
    year, month, day, hour = stamp[:4], int(stamp[5:7]), int(stamp[8:10]), int(stamp[11:13]) + 1
    return (
        f"{year},{month},{day},{hour},60,?9,{air:.2f},{dew:.2f},{humidity:.0f},{pressure:.0f},{top:.0f},{normal:.0f},"
        f"{longwave:.1f},{ghi:.2f},{dni:.2f},{dhi:.2f},999999,999999,999999,9999,999,{wind:.2f},{cloud:.1f},{cloud:.1f},"
        f"9999,99999,9,999999999,999,.999,999,99,{albedo:g},999,99"
    )
