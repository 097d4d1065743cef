"""What a weather file is worth: place, span, gaps, time stamps, findings, sums; and the curves of its figure."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import zero_Celsius

from weather.evidence import clear_sky
from weather.stations import open_weather
from weather.sun import sun_position
from weather.year import Floats, WeatherYear

__all__ = ["Survey", "survey_of"]

RADIATION = ("ghi", "dni", "dhi")
BEAM = 50.0  # W/m2, from which an hour stands in the closure's cloud


class Survey(NamedTuple):
    """The account of a weather file, and hourly curves for its figure."""

    account: dict[str, Any]
    curves: Mapping[str, Floats]


def survey_of(name: str, *, base: Path) -> Survey:
    """Read a weather file, a bundled station or a scenario's weather, and tell what is in it.

    Parameters
    ----------
    name
        A station, the path of a weather file, or of a scenario in TOML whose weather is meant.
    base
        Folder that a path counts from.

    Returns
    -------
    Survey
        Of whatever could be read, with all findings.
    """
    weather = _read(name, base=base)
    sun = sun_position(weather)
    clear = clear_sky(sun, site=weather.site)
    cosine = np.maximum(np.cos(np.radians(sun.apparent_zenith_deg)), 0.0)
    curves = {
        "ghi": weather.ghi,
        "clear": clear,
        "components": weather.dhi + weather.dni * cosine,
        "lit": (weather.dni > BEAM).astype(float),
        "t_air_C": weather.t_air - zero_Celsius,
        "wind": weather.wind,
        "solar_hour": sun.solar_hour,
    }
    return Survey(_account(weather, clear=clear), curves)


def _read(name: str, *, base: Path) -> WeatherYear:
    if not name.lower().endswith(".toml"):
        return open_weather(name, base=base)
    from collector.build.reading import read_scenario
    from collector.study.year import read_scenario_weather

    path = base / name
    return read_scenario_weather(read_scenario(path), base=path.parent)


def _account(weather: WeatherYear, *, clear: Floats) -> dict[str, Any]:
    site, stamp = weather.site, weather.stamp
    local = weather.time_mid + np.timedelta64(round(site.utc_offset_h * 3600), "s")
    return {
        "file": weather.file,
        "format": weather.format,
        "place": site.name,
        "latitude_deg": site.latitude_deg,
        "longitude_deg": site.longitude_deg,
        "altitude_m": site.altitude_m,
        "utc_offset_h": site.utc_offset_h,
        "step_min": weather.step_min,
        "hours": len(weather),
        "years": weather.years,
        "first_mid": str(local[0])[:16].replace("T", " "),
        "last_mid": str(local[-1])[:16].replace("T", " "),
        "source_years": list(weather.source_years),
        "radiation_made": weather.made,
        "stamp_rule_min": stamp.rule_min,
        "stamp_found_min": stamp.found_min,
        "stamp_used_min": stamp.used_min,
        "stamp_error_W_m2": stamp.rmse_w_m2,
        "stamp_error_unshifted_W_m2": stamp.rmse_unshifted_w_m2,
        "gaps": [gap._asdict() for gap in weather.gaps],
        "findings": [vars(each) for each in weather.findings],
        "notices": list(weather.notices),
        "columns": [name for name in COLUMNS if getattr(weather, name) is not None],
        **_sums(weather, np.ones(len(weather), dtype=bool), years=weather.years),
        "clear_sky_kWh_m2": float(clear.sum()) / 1e3 / weather.years,
        "months": [_month(weather, number) for number in range(1, 13)],
        "by_year": _by_year(weather, local),
    }


COLUMNS = (*RADIATION, "t_air", "wind", "t_dew", "cloud", "longwave", "albedo")


def _sums(weather: WeatherYear, mask: np.ndarray[Any, np.dtype[np.bool_]], *, years: int) -> dict[str, float]:
    """Sums a year, and means, over the hours of a mask."""
    celsius, wind = weather.t_air[mask] - zero_Celsius, weather.wind[mask]
    light = {f"{name}_kWh_m2": float(getattr(weather, name)[mask].sum()) / 1e3 / years for name in RADIATION}
    return light | {
        "air_mean_C": float(celsius.mean()),
        "air_min_C": float(celsius.min()),
        "air_max_C": float(celsius.max()),
        "wind_mean_m_s": float(wind.mean()),
        "wind_max_m_s": float(wind.max()),
    }


def _month(weather: WeatherYear, number: int) -> dict[str, float]:
    return {"month": number, **_sums(weather, weather.month == number, years=weather.years)}


def _by_year(weather: WeatherYear, local: np.ndarray[Any, np.dtype[np.datetime64]]) -> list[dict[str, float]]:
    """Each calendar year by itself, where there are several."""
    if weather.years == 1:
        return []
    of_hour = local.astype("datetime64[Y]").astype(int) + 1970
    return [
        {"year": int(year), "hours": int(np.count_nonzero(of_hour == year)), **_sums(weather, of_hour == year, years=1)}
        for year in np.unique(of_hour)
    ]
