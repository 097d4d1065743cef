"""Numbers that look right only in another unit or on the other side of the equator."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from scipy.constants import zero_Celsius

from weather.evidence import Evidence
from weather.findings import Finding
from weather.year import Floats

__all__ = ["unit_findings"]

WARMEST = 36.0  # C, no place's yearly mean is higher; one in Fahrenheit nearly always is
WILDEST, WINDIEST = 45.0, 12.0  # m/s of an hour, and of a year's mean, beyond which a unit is likelier than a wind
BRIGHT, DIM = 1.45, 0.62  # of a clean sky's GHI, at the brightest hours of the year
OFF_TROPICS = 20.0  # deg of latitude, from which the year's course tells the hemisphere
AGAINST = -0.3  # correlation of daily sunlight with what comes in outside the atmosphere
DO_UNIT = "convert the column, or give its unit under [place.columns]"


def unit_findings(e: Evidence) -> Iterator[Finding]:
    """Temperature, wind and irradiance in another unit; the year's course of the other hemisphere.

    Parameters
    ----------
    e
        Of a file.

    Yields
    ------
    Finding
        Each would spoil the year.
    """
    yield from _air(e)
    yield from _wind(e)
    yield from _irradiance(e)
    yield from _hemisphere(e)


def _air(e: Evidence) -> Iterator[Finding]:
    t_air = e.read("t_air")
    if t_air is None:
        return
    mean, known = float(np.nanmean(t_air)) - zero_Celsius, np.isfinite(t_air)
    highest = float(np.nanmax(t_air)) - zero_Celsius
    if mean > 200.0 - 40.0:
        what = f"air temperature has a mean of {mean:.0f} C: the column is in kelvin"
    elif mean > WARMEST or highest > 65.0:
        what = (
            f"air temperature has a mean of {mean:.0f} C and goes to {highest:.0f} C: the column is in Fahrenheit "
            f"(mean {(mean - 32.0) / 1.8:.0f} C then)"
        )
    else:
        return
    yield from e.finding("temperature-unit", known, severity="stop", what=what, do=DO_UNIT)


def _wind(e: Evidence) -> Iterator[Finding]:
    wind = e.read("wind")
    if wind is None:
        return
    mean, highest = float(np.nanmean(wind)), float(np.nanquantile(wind, 0.998))
    if mean > WINDIEST or highest > WILDEST or (mean > 8.0 and highest > 35.0):
        what = (
            f"wind has a mean of {mean:.1f} m/s and goes to {np.nanmax(wind):.0f} m/s: the column is in km/h or mph "
            f"(mean {mean / 3.6:.1f} m/s from km/h)"
        )
        yield from e.finding("wind-unit", np.isfinite(wind), severity="stop", what=what, do=DO_UNIT)


def _irradiance(e: Evidence) -> Iterator[Finding]:
    ghi = e.read("ghi")
    if ghi is None:
        return
    high = (e.cosine > 0.3) & np.isfinite(ghi)
    if np.count_nonzero(high) < 500:
        return
    brightest = float(np.quantile(ghi[high] / e.clear[high], 0.99))
    if DIM < brightest < BRIGHT:
        return
    likely = f"the unit is likely {_likely(brightest)}" if brightest < DIM or brightest > BRIGHT else ""
    what = f"the brightest hours have {brightest:.2f} of a clean, clear sky's GHI, where some 1.0 is usual: {likely}"
    yield from e.finding("irradiance-unit", high, severity="stop", what=what, do=DO_UNIT)


def _likely(factor: float) -> str:
    """Unit whose factor comes nearest."""
    known = {
        "kJ/m2 an hour, read as W/m2": 3.6,
        "W/m2 or Wh/m2, read as kJ/m2 an hour": 1.0 / 3.6,
        "Wh/m2 of half an hour, read as W/m2": 0.5,
        "Wh/m2 of a quarter of an hour, read as W/m2": 0.25,
        "MJ/m2 an hour, read as W/m2": 3.6e-3,
        "kW/m2, read as W/m2": 1e-3,
        "J/cm2 an hour, read as W/m2": 0.36,
    }
    return min(known, key=lambda name: abs(np.log(max(factor, 1e-6) / known[name])))


def _hemisphere(e: Evidence) -> Iterator[Finding]:
    ghi, latitude = e.read("ghi"), e.site.latitude_deg
    if ghi is None or abs(latitude) < OFF_TROPICS:
        return
    own, other = (_course(ghi, e, latitude_deg=sign * latitude) for sign in (1.0, -1.0))
    if own < AGAINST and other > -AGAINST:
        what = (
            f"daily sunlight runs against the year's course at latitude {latitude:g} (correlation {own:.2f}, {other:.2f} for the "
            "other hemisphere)"
        )
        do = "mend the latitude's sign (south is negative) in the header or under [place]"
        yield from e.finding("hemisphere", ghi > 0.0, severity="stop", what=what, do=do)


def _course(ghi: Floats, e: Evidence, *, latitude_deg: float) -> float:
    """Correlation of daily sunlight with daily irradiation outside the atmosphere; Duffie & Beckman, Eq. 1.10.3."""
    days = len(ghi) // 24
    daily = np.nan_to_num(ghi[: 24 * days]).reshape(days, 24).sum(axis=1)
    declination = np.radians(e.sun.declination_deg[: 24 * days].reshape(days, 24).mean(axis=1))
    latitude = np.radians(latitude_deg)
    sunset = np.arccos(np.clip(-np.tan(latitude) * np.tan(declination), -1.0, 1.0))
    outside = np.cos(latitude) * np.cos(declination) * np.sin(sunset) + sunset * np.sin(latitude) * np.sin(declination)
    return float(np.corrcoef(daily, outside)[0, 1]) if daily.std() > 0.0 else 0.0
