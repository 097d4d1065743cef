"""A file's several calendar years, one by one."""

from __future__ import annotations

from dataclasses import fields, replace
from itertools import pairwise

import numpy as np

from weather.year import WeatherYear

__all__ = ["calendar_years"]

INTO_THE_YEAR = np.timedelta64(100, "D")  # from a year's first hour, wherever the clock's zone puts that


def calendar_years(weather: WeatherYear) -> list[WeatherYear]:
    """Each calendar year of a file by itself.

    Parameters
    ----------
    weather
        One year, or several in their order.

    Returns
    -------
    list of WeatherYear
        The same one where there is only one. Notices and findings are the whole file's.
    """
    if weather.years <= 1:
        return [weather]
    first = weather.time_mid[0]
    year = (first + INTO_THE_YEAR).astype("datetime64[Y]")
    starts = (year + np.arange(weather.years + 1)).astype("datetime64[D]")
    cuts = np.searchsorted(weather.time_mid, first + (starts - starts[0]))
    arrays = [each.name for each in fields(weather) if isinstance(getattr(weather, each.name), np.ndarray)]
    return [
        replace(
            weather,
            source_years=(int(str(start)[:4]),),
            gaps=tuple(gap for gap in weather.gaps if gap.first[:4] == str(start)[:4]),
            **{name: getattr(weather, name)[begin:end] for name in arrays},
        )
        for start, (begin, end) in zip(starts[:-1], pairwise(cuts), strict=True)
    ]
