"""Where the sun stands at the middle of each hour."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from weather.year import Floats, Site, WeatherYear

__all__ = ["Sun", "sun_at", "sun_position"]


@dataclass(frozen=True, kw_only=True)
class Sun:
    """The sun over a site, each ``(n,)``.

    Parameters
    ----------
    apparent_zenith_deg, azimuth_deg
        Refracted zenith angle; azimuth clockwise from north [deg].
    hour_angle_deg, declination_deg
        Hour angle from solar noon, west positive [deg].
    dni_extra
        Normal irradiance outside the atmosphere [W/m2].
    """

    apparent_zenith_deg: Floats
    azimuth_deg: Floats
    hour_angle_deg: Floats
    declination_deg: Floats
    dni_extra: Floats

    @property
    def solar_hour(self) -> Floats:
        """Solar time from midnight [h]."""
        return self.hour_angle_deg / 15.0 + 12.0


def sun_position(weather: WeatherYear) -> Sun:
    """Sun at the middle of each of the year's hours.

    Parameters
    ----------
    weather
        n hours.

    Returns
    -------
    Sun
        n hours.
    """
    return sun_at(weather.time_mid, site=weather.site)


def sun_at(time: NDArray[np.datetime64], *, site: Site, pressure: float | None = None, t_air_degC: float = 12.0) -> Sun:  # noqa: N803 # the unit's symbol
    """Sun at given instants.

    Parameters
    ----------
    time
        UTC, ``(n,)``.
    site
        Place.
    pressure, t_air_degC
        For the refraction; the standard atmosphere at the site's altitude and a yearly mean if not given [Pa, C].

    Returns
    -------
    Sun
        n instants.

    Notes
    -----
    **Source**: Reda & Andreas, NREL/TP-560-34302 (2004), through pvlib; Spencer (1971) for the distance, solar constant
    1361 W/m2.
    """
    return _sun(
        time.astype("datetime64[s]").tobytes(), site, pressure=pressure or _standard(site), t_air_degC=t_air_degC
    )


@lru_cache(maxsize=4)
def _sun(instants: bytes, site: Site, *, pressure: float, t_air_degC: float) -> Sun:  # noqa: N803 # the unit's symbol
    """Remember the last few: the reader asks for the sun to find the stamp's convention, the year for the plane."""
    import pandas as pd
    from pvlib import irradiance, solarposition

    index = pd.DatetimeIndex(np.frombuffer(instants, dtype="datetime64[s]")).tz_localize("UTC")
    found = solarposition.spa_python(
        index,
        site.latitude_deg,
        site.longitude_deg,
        site.altitude_m,
        pressure=pressure,
        temperature=t_air_degC,
        delta_t=67.0,
    )
    zenith, azimuth = np.radians(found["zenith"].to_numpy()), np.radians(found["azimuth"].to_numpy())
    latitude = np.radians(site.latitude_deg)
    sine = np.sin(latitude) * np.cos(zenith) + np.cos(latitude) * np.sin(zenith) * np.cos(azimuth)
    west = -np.sin(zenith) * np.sin(azimuth)
    noon = np.cos(zenith) * np.cos(latitude) - np.sin(zenith) * np.cos(azimuth) * np.sin(latitude)
    return Sun(
        apparent_zenith_deg=found["apparent_zenith"].to_numpy(),
        azimuth_deg=found["azimuth"].to_numpy(),
        hour_angle_deg=np.degrees(np.arctan2(west, noon)),
        declination_deg=np.degrees(np.arcsin(np.clip(sine, -1.0, 1.0))),
        dni_extra=np.asarray(
            irradiance.get_extra_radiation(index.day_of_year.to_numpy(), solar_constant=1361.0, method="spencer")
        ),
    )


def _standard(site: Site) -> float:
    from pvlib.atmosphere import alt2pres

    return float(alt2pres(site.altitude_m))
