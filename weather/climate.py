"""A place known by twelve monthly means, and what such means may be."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from pvlib.clearsky import simplified_solis

from weather.errors import Problem
from weather.sun import Sun, sun_at
from weather.year import Floats, Site

__all__ = [
    "BOUNDS",
    "CLEAN_SKY",
    "MONTHS",
    "STATED_SKY",
    "YEAR",
    "Climate",
    "Frame",
    "Indices",
    "Sky",
    "climate_problems",
    "frame_of",
    "under_clear_sky",
]

Indices = NDArray[np.int64]

YEAR = 2006  # calendar of a synthetic year: the middle of the leap cycle
MONTHS = (
    "January", "February", "March", "April", "May", "June",
    "July", "August", "September", "October", "November", "December",
)  # fmt: skip
DARK = 0.05  # kWh/m2 a day, up to which hours at their middle do not tell a polar night's edge: met as far as it goes
LEAST_CLEARNESS = 0.06  # of a month's mean; the darkest day of the published curve has 0.05
CLOCK = 4.0  # h at most between clock and longitude, as for weather files
BOUNDS = {  # of a month's mean, by the key of a climate file: lowest, highest, unit
    "ghi_kWh_m2": (0.0, 15.0, "kWh/m2"),
    "air_C": (-70.0, 42.0, "C"),
    "range_K": (0.5, 30.0, "K"),
    "daily_K": (0.1, 12.0, "K"),
    "humidity_percent": (5.0, 100.0, "%"),
    "wind_m_s": (0.0, 15.0, "m/s"),
}


@dataclass(frozen=True, kw_only=True)
class Sky:
    """A sky without cloud.

    Parameters
    ----------
    aerosol
        Optical depth at 700 nm.
    water_cm
        Water vapour above the place [cm].
    """

    aerosol: float
    water_cm: float


STATED_SKY = Sky(aerosol=0.1, water_cm=1.4)  # of the year without cloud; common practice, no source
CLEAN_SKY = Sky(aerosol=0.02, water_cm=0.5)  # what no hour of a synthetic year is above; our choice


@dataclass(frozen=True, kw_only=True, eq=False)
class Climate:
    """Twelve monthly means of a place, each ``(12,)`` and within ``BOUNDS``.

    Parameters
    ----------
    site
        The place.
    ghi_kWh_m2
        Global horizontal irradiation, mean of a day [kWh/m2].
    t_air
        Air temperature [K].
    t_range
        Daily maximum less daily minimum [K]; None if not known.
    t_spread
        Standard deviation of the daily mean temperature from day to day [K]; None if not known.
    humidity
        Relative humidity, fraction; None if not known.
    wind
        [m/s]; None if not known.
    """

    site: Site
    ghi_kWh_m2: Floats  # noqa: N815 # the unit's symbol
    t_air: Floats
    t_range: Floats | None = None
    t_spread: Floats | None = None
    humidity: Floats | None = None
    wind: Floats | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class Frame:
    """The hours of a synthetic year before any weather: 365 days by the local clock, each ``(8760,)``.

    Parameters
    ----------
    site
        The place.
    time_mid
        Middle of each hour, UTC.
    month, day
        Of the middle of the hour: 0 to 11, 0 to 364.
    sun
        At mid-hour.
    cosine
        Of the sun's true zenith angle, 0 with the sun down.
    top
        Irradiance on the horizontal outside the atmosphere [W/m2].
    limit
        The same under the clean, dry sky [W/m2].
    limit_normal
        Direct normal irradiance under that sky [W/m2].
    """

    site: Site
    time_mid: NDArray[np.datetime64]
    month: Indices
    day: Indices
    sun: Sun
    cosine: Floats
    top: Floats
    limit: Floats
    limit_normal: Floats

    def by_month(self, values: Floats) -> Floats:
        """Means over the months, ``(12,)``."""
        return np.asarray(np.bincount(self.month, values, 12) / np.bincount(self.month, minlength=12))

    def by_day(self, values: Floats) -> Floats:
        """Sums over the days, ``(365,)``."""
        return np.asarray(np.bincount(self.day, values, 365))

    @property
    def month_of_day(self) -> Indices:
        """Month of each day, 0 to 11, ``(365,)``."""
        return self.month[12::24]


def frame_of(site: Site) -> Frame:
    """Hours, sun and limits of a place's year.

    Parameters
    ----------
    site
        The place.

    Returns
    -------
    Frame
        8760 hours, at their middle.
    """
    local = np.datetime64(f"{YEAR}-01-01T00:30:00", "s") + np.arange(8760) * np.timedelta64(3600, "s")
    time_mid = local - np.timedelta64(round(3600.0 * site.utc_offset_h), "s")
    sun = sun_at(time_mid, site=site)
    latitude, declination = np.radians(site.latitude_deg), np.radians(sun.declination_deg)
    turn = np.cos(np.radians(sun.hour_angle_deg))
    cosine = np.sin(latitude) * np.sin(declination) + np.cos(latitude) * np.cos(declination) * turn
    cosine = np.maximum(cosine, 0.0)
    limit, normal = under_clear_sky(sun, cosine=cosine, site=site, sky=CLEAN_SKY)
    return Frame(
        site=site,
        time_mid=time_mid,
        month=local.astype("datetime64[M]").astype(np.int64) % 12,
        day=np.arange(8760) // 24,
        sun=sun,
        cosine=cosine,
        top=sun.dni_extra * cosine,
        limit=limit,
        limit_normal=normal,
    )


def under_clear_sky(sun: Sun, *, cosine: Floats, site: Site, sky: Sky) -> tuple[Floats, Floats]:
    """Irradiance without cloud.

    Parameters
    ----------
    sun
        At mid-hour.
    cosine
        Of the true zenith angle, 0 with the sun down.
    site
        For the air's pressure.
    sky
        Aerosol and water.

    Returns
    -------
    ndarray
        Global horizontal, at most what comes in at the top [W/m2].
    ndarray
        Direct normal, no more than the global allows [W/m2].

    Notes
    -----
    **Source**: Ineichen, Solar Energy 82 (2008) 758, through pvlib; pressure of the standard atmosphere.
    """
    from pvlib.atmosphere import alt2pres

    found = simplified_solis(
        90.0 - sun.apparent_zenith_deg,
        aod700=sky.aerosol,
        precipitable_water=sky.water_cm,
        pressure=float(alt2pres(site.altitude_m)),
        dni_extra=sun.dni_extra,
    )
    up = cosine > 0.0
    ghi = np.where(up, np.clip(found["ghi"], 0.0, sun.dni_extra * cosine), 0.0)
    dni = np.where(up, np.clip(found["dni"], 0.0, ghi / np.where(up, cosine, 1.0)), 0.0)
    return ghi, dni


def climate_problems(climate: Climate, *, frame: Frame, where: Callable[[str], str]) -> list[Problem]:
    """Faults of monthly means that no year can have.

    Parameters
    ----------
    climate
        Each number within ``BOUNDS``.
    frame
        The hours of its place.
    where
        Place of a key of the climate, for messages.

    Returns
    -------
    list of Problem
        Empty if all is well.
    """
    site, found = climate.site, []
    if abs((site.longitude_deg / 15.0 - site.utc_offset_h + 12.0) % 24.0 - 12.0) > CLOCK:
        found.append(
            Problem(
                where=where("utc_offset_h"),
                what="place.utc_offset_h: clock and longitude do not belong together",
                got=f"longitude {site.longitude_deg:g}, UTC offset {site.utc_offset_h:g} h",
                allowed=f"an offset within {CLOCK:g} h of longitude/15",
                do="east is positive in both",
            )
        )
    top, limit = (24e-3 * frame.by_month(values) for values in (frame.top, frame.limit))
    limits = zip(climate.ghi_kWh_m2.tolist(), top.tolist(), limit.tolist(), strict=True)
    faults = [_out_of_reach(asked, outside, clear) for asked, outside, clear in limits]
    do = "means of a day in kWh/m2; check month and hemisphere"
    found += [
        Problem(where=where("ghi_kWh_m2"), what=f"months.ghi_kWh_m2: {name} is {fault[0]}", do=do, **fault[1])
        for name, fault in zip(MONTHS, faults, strict=True)
        if fault is not None
    ]
    return found


def _out_of_reach(asked: float, top: float, limit: float) -> tuple[str, dict[str, Any]] | None:
    """What is the matter with a month's mean, and the limits."""
    if max(asked, top) <= DARK:
        return None
    low = LEAST_CLEARNESS * top
    said = {"got": f"{asked:g} kWh/m2 a day", "allowed": f"{low:.2f} to {limit:.2f}, clear and dry all month"}
    if asked > top:
        return f"above what comes in outside the atmosphere there, {top:.2f}", said
    if asked > limit:
        return "above what comes through a clear sky there", said
    return ("darker than any sky", said) if asked < low else None
