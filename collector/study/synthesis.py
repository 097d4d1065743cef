"""An hourly year out of a climate table: what was asked of it, what it met, and the file that holds it."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.constants import zero_Celsius

from weather.climate import CLEAN_SKY, STATED_SKY, Climate
from weather.epw import epw_text
from weather.sky import magnus_vapour_pressure
from weather.synthesis import METHODS, synthesise
from weather.year import Floats, WeatherYear

__all__ = ["synthetic_year"]

STATED = f"aerosol optical depth {STATED_SKY.aerosol:g} at 700 nm, {STATED_SKY.water_cm:g} cm of water"
CLEAN = f"aerosol optical depth {CLEAN_SKY.aerosol:g} at 700 nm, {CLEAN_SKY.water_cm:g} cm of water"
CLEAR = f"without cloud all year: Ineichen 2008, Solar Energy 82, 758, through pvlib; {STATED}"
SUNLESS = ("daily clearness", "hourly clearness", "diffuse share", "cloud")  # what a year without cloud does without


def synthetic_year(climate: Climate, *, seed: int, clear_sky: bool, source: str) -> tuple[dict[str, Any], str]:
    """Make a year and hold it against its climate.

    Parameters
    ----------
    climate
        Twelve monthly means.
    seed
        Of the year's chance.
    clear_sky
        No cloud all year, as an upper bound.
    source
        Name of the climate's file.

    Returns
    -------
    dict
        Months asked for and met, methods, seed; plain values.
    str
        The year as an EPW file.
    """
    year = synthesise(climate, seed=seed, clear_sky=clear_sky, where=source)
    methods = _methods(clear_sky=clear_sky)
    site = year.site
    found = {
        "title": site.name,
        "source": source,
        "seed": seed,
        "clear_sky": clear_sky,
        "place": {
            "latitude": site.latitude_deg,
            "longitude": site.longitude_deg,
            "altitude_m": site.altitude_m,
            "utc_offset_h": site.utc_offset_h,
        },
        "ghi_kWh_m2": float(year.ghi.sum() / 1e3),
        "dhi_kWh_m2": float(year.dhi.sum() / 1e3),
        "dni_kWh_m2": float(year.dni.sum() / 1e3),
        "months": _months(climate, year),
        "methods": methods,
        "notices": list(year.notices),
    }
    return found, epw_text(year, comments=_comments(found))


def _methods(*, clear_sky: bool) -> dict[str, str]:
    if not clear_sky:
        return METHODS | {"limit": f"no hour above a clean clear sky: Ineichen 2008, through pvlib; {CLEAN}"}
    return {"sunlight": CLEAR} | {name: words for name, words in METHODS.items() if name not in SUNLESS}


def _comments(found: dict[str, Any]) -> tuple[str, str]:
    first = (
        f"SYNTHETIC and not measured: made by noonplate from the twelve monthly means in {found['source']} with seed "
        f"{found['seed']}; no hour and no day of it has ever been"
    )
    return first, "Methods: " + "; ".join(f"{name}: {words}" for name, words in found["methods"].items())


def _months(climate: Climate, year: WeatherYear) -> list[dict[str, Any]]:
    met = _means(year)
    asked = {
        "ghi_kWh_m2": climate.ghi_kWh_m2,
        "air_C": climate.t_air - zero_Celsius,
        "range_K": climate.t_range,
        "humidity_percent": None if climate.humidity is None else 100.0 * climate.humidity,
        "wind_m_s": climate.wind,
    }
    return [
        {"month": number + 1}
        | {f"asked_{name}": None if means is None else float(means[number]) for name, means in asked.items()}
        | {name: float(values[number]) for name, values in met.items()}
        for number in range(12)
    ]


def _means(year: WeatherYear) -> dict[str, Floats]:
    """Monthly means of a synthetic year, each ``(12,)``."""
    hours = np.bincount(year.month - 1, minlength=12)
    days = year.t_air.reshape(-1, 24)
    width = np.repeat(days.max(axis=1) - days.min(axis=1), 24)
    assert year.t_dew is not None  # noqa: S101 # a synthetic year has it
    humidity = magnus_vapour_pressure(year.t_dew) / magnus_vapour_pressure(year.t_air)
    columns = {
        "ghi_kWh_m2": 24e-3 * year.ghi,
        "air_C": year.t_air - zero_Celsius,
        "range_K": width,
        "humidity_percent": 100.0 * humidity,
        "wind_m_s": year.wind,
    }
    return {name: np.bincount(year.month - 1, values, 12) / hours for name, values in columns.items()}
