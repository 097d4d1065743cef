"""Weather years written again as plain tables in CSV, for the mapping of columns; and a year of the southern hemisphere."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
import pandas as pd
import pvlib

from weather.formats.table import Columns
from weather.year import WeatherYear

NAMES = {
    "ghi": "Global", "dni": "Direct", "dhi": "Diffuse", "t_air": "Air", "wind": "Wind", "t_dew": "Dew",
}  # fmt: skip
OFFSETS = {"start": -0.5, "middle": 0.0, "end": 0.5}  # steps from the middle to the stamp


def mapping(*, stamp: Any = "start", **more: Any) -> Columns:
    return Columns(**{"time": ("Time",), "stamp": stamp, **NAMES} | more)


def frame_of(weather: WeatherYear) -> pd.DataFrame:
    """The year in a file's units, at the middle of each hour in local standard time."""
    local = pd.DatetimeIndex(weather.time_mid) + pd.Timedelta(hours=weather.site.utc_offset_h)
    columns = {label: getattr(weather, name) for name, label in NAMES.items() if getattr(weather, name) is not None}
    frame = pd.DataFrame(columns, index=local)
    for name in ("Air", "Dew"):
        if name in frame:
            frame[name] = (frame[name] - 273.15).round(2)
    return frame.round(3)


def table_text(
    frame: pd.DataFrame, *, stamp: str = "start", step_min: float = 60.0, form: str = "%Y-%m-%d %H:%M"
) -> str:
    """CSV whose stamps mark the start, middle or end of the step; the frame's index is the middle."""
    stamps = frame.index + pd.Timedelta(minutes=step_min * OFFSETS[stamp])
    return frame.set_axis(stamps.strftime(form), axis=0).to_csv(index_label="Time")


def place_of(weather: WeatherYear) -> dict[str, float]:
    site = weather.site
    return {
        "latitude_deg": site.latitude_deg,
        "longitude_deg": site.longitude_deg,
        "altitude_m": site.altitude_m,
        "utc_offset_h": site.utc_offset_h,
    }


def southern_frame(years: Sequence[int] = (2015,), *, step_min: float = 60.0, latitude: float = -33.9) -> pd.DataFrame:
    """A made year of clear and cloudy days at 33.9 S, 18.4 E, UTC+2, closing at the middle of each step."""
    stamps = pd.date_range(f"{years[0]}-01-01", f"{years[-1]}-12-31 23:59", freq=pd.Timedelta(minutes=step_min))
    middle = stamps + pd.Timedelta(minutes=0.5 * step_min)
    zenith = pvlib.solarposition.get_solarposition(middle.tz_localize(7200), latitude, 18.4, altitude=40.0)["zenith"]
    cosine = np.maximum(np.cos(np.radians(zenith.to_numpy())), 0.0)
    cloudy = np.random.default_rng(4).uniform(0.1, 1.0, size=len(middle) // round(1440 / step_min) + 1)
    clear = np.repeat(cloudy, round(1440 / step_min))[: len(middle)]
    dni, dhi = 950.0 * cosine**0.3 * clear, (90.0 + 160.0 * (1.0 - clear)) * cosine**0.6
    day = middle.day_of_year.to_numpy()
    air = 16.0 + 5.0 * np.cos(2.0 * np.pi * (day - 20.0) / 365.0) + 6.0 * cosine + 3.0 * clear
    wind = 3.0 + 2.0 * np.sin(0.7 * np.arange(len(middle)) * step_min / 60.0) * clear
    columns = {"Global": dhi + dni * cosine, "Direct": dni, "Diffuse": dhi, "Air": air, "Wind": wind, "Dew": air - 5.0}
    return pd.DataFrame(columns, index=middle).round(3)


SOUTH = {"latitude_deg": -33.9, "longitude_deg": 18.4, "altitude_m": 40.0, "utc_offset_h": 2.0}
Change = Callable[[pd.DataFrame], pd.DataFrame]
