"""A checked year of weather on one time axis, and the place it belongs to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from weather.findings import Finding

__all__ = ["Floats", "Gap", "Mask", "Site", "Stamp", "WeatherYear"]

Floats = NDArray[np.float64]
Mask = NDArray[np.bool_]


@dataclass(frozen=True, kw_only=True)
class Site:
    """A place on the ground.

    Parameters
    ----------
    name
        As the file has it.
    latitude_deg, longitude_deg
        North and east positive [deg].
    altitude_m
        Above sea level [m].
    utc_offset_h
        Local standard time minus UTC [h].
    """

    name: str
    latitude_deg: float
    longitude_deg: float
    altitude_m: float
    utc_offset_h: float


@dataclass(frozen=True, kw_only=True)
class Stamp:
    """Where in its hour a row's time stamp stands, and how that was found.

    Parameters
    ----------
    rule_min
        Minutes to add to the file's stamp to reach the middle of the hour, by the rule of the file's format [min].
    found_min
        The same, by closure of GHI against DHI + DNI cos z [min]; None where the file has too little beam to tell.
    used_min
        The one in use [min].
    rmse_w_m2, rmse_unshifted_w_m2
        Closure error at the shift found and with the stamp taken as it stands [W/m2].
    """

    rule_min: float
    found_min: float | None
    used_min: float
    rmse_w_m2: float | None
    rmse_unshifted_w_m2: float | None


class Gap(NamedTuple):
    """Hours in a row that a column lacked and that were filled: which column, from when by the file's clock, how many."""

    column: str
    first: str
    hours: int


@dataclass(frozen=True, kw_only=True, eq=False)
class WeatherYear:
    """One year of hourly weather, complete and checked; or several calendar years in their order.

    Every array has shape ``(n,)``, n = 8760 or 8784 (a sum of those for several years), is read-only and free of NaN. A column
    that the file does not have, or has only in part, is None and never invented.

    Parameters
    ----------
    site
        The place.
    file, format
        Where the numbers come from, as a user would name it, and the format that was recognised.
    stamp
        The time-stamp convention found.
    time_mid
        Middle of each hour, UTC [datetime64[s]].
    month
        Month of the middle of the hour in local standard time, 1 to 12.
    ghi, dni, dhi
        Global horizontal, direct normal, diffuse horizontal irradiance [W/m2].
    t_air
        Dry-bulb air temperature [K].
    wind
        Wind speed as the file has it [m/s].
    t_dew
        Dew-point temperature [K].
    cloud
        Opaque cloud cover (total where the file has only that), fraction 0 to 1.
    longwave
        Long-wave irradiance from the sky on the horizontal, the file's own column [W/m2].
    albedo
        The file's ground reflectance, fraction.
    pressure
        Mean air pressure of the place [Pa].
    source_years
        The calendar years that the rows come from.
    notices
        What was filled, clipped, missing or odd, a sentence each, with counts.
    findings
        What the checks of the file found, the gravest first.
    gaps
        What was missing and has been filled.
    step_min
        From row to row of the file [min].
    made
        Which columns of radiation were made from the others, and how; None if the file has all three.
    """

    site: Site
    file: str
    format: str
    stamp: Stamp
    time_mid: NDArray[np.datetime64]
    month: NDArray[np.int64]
    ghi: Floats
    dni: Floats
    dhi: Floats
    t_air: Floats
    wind: Floats
    t_dew: Floats | None
    cloud: Floats | None
    longwave: Floats | None
    albedo: Floats | None
    pressure: float
    source_years: tuple[int, ...]
    notices: tuple[str, ...]
    findings: tuple[Finding, ...] = ()
    gaps: tuple[Gap, ...] = ()
    step_min: float = 60.0
    made: str | None = None

    def __post_init__(self) -> None:
        for value in vars(self).values():
            _freeze(value)

    def __len__(self) -> int:
        return len(self.ghi)

    @property
    def years(self) -> int:
        """How many whole years the axis holds."""
        return round(len(self) / 8766.0)


def _freeze(value: Any) -> None:
    if isinstance(value, np.ndarray):
        value.setflags(write=False)
