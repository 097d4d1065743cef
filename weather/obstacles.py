"""What stands before the sky: a horizon line all around, and rows of collectors in front of each other.

Rules of this module, for what the sources leave open:

- The sun's way through an hour is taken in twelve parts of five minutes; the hour's beam (with the circumsolar part) is spread
  over them as the cosine of incidence, and a part whose sun is behind the horizon brings none.
- Isotropic sky and horizon brightening are reduced by the same share, that of the sky's view. How the remaining sky is spread over
  the angles of incidence is left as without obstacles.
- A horizon leaves the light from the ground as it is.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from weather.plane import PlaneIrradiance
from weather.rows import Rows
from weather.sun import Sun, sun_at
from weather.year import Floats, WeatherYear

__all__ = ["Horizon", "Obstacles", "behind", "open_beam", "sky_view"]

AROUND = 1440  # directions of the compass in the view of the sky
PARTS = 12  # of an hour


@dataclass(frozen=True, kw_only=True)
class Horizon:
    """Elevation of the skyline over azimuth, straight between its points and around the circle.

    Parameters
    ----------
    azimuth_deg
        Rising, 0 to 360, clockwise from north [deg].
    elevation_deg
        At each of them; below 0 counts as 0 [deg].
    """

    azimuth_deg: tuple[float, ...]
    elevation_deg: tuple[float, ...]

    def elevation(self, azimuth_deg: Floats) -> Floats:
        """Return the skyline's elevation in these directions, never below 0 [deg]."""
        whole = [azimuth % 360.0 for azimuth in self.azimuth_deg]
        found = np.interp(azimuth_deg % 360.0, *_around(whole, self.elevation_deg))
        return np.maximum(found, 0.0)


def _around(azimuth: list[float], elevation: tuple[float, ...]) -> tuple[Floats, Floats]:
    """Points of a circle, with the last one before the first and the first one after the last."""
    order = np.argsort(azimuth, kind="stable")
    at, up = np.array(azimuth)[order], np.array(elevation)[order]
    return np.r_[at[-1] - 360.0, at, at[0] + 360.0], np.r_[up[-1], up, up[0]]


@dataclass(frozen=True, kw_only=True)
class Obstacles:
    """What stands before a tilted plane.

    Parameters
    ----------
    tilt_deg, azimuth_deg
        Of the plane: from the horizontal; clockwise from north [deg].
    horizon, rows
        Either or both.
    """

    tilt_deg: float
    azimuth_deg: float
    horizon: Horizon | None = None
    rows: Rows | None = None

    @property
    def sky_open(self) -> float:
        """Share of the sky's view that is left, as the field's mean; for diffuse light and for long wave."""
        around = _compass()
        skyline = np.zeros(AROUND) if self.horizon is None else self.horizon.elevation(around)
        free = sky_view(np.zeros(AROUND), tilt_deg=self.tilt_deg, azimuth_deg=self.azimuth_deg)
        first = sky_view(skyline, tilt_deg=self.tilt_deg, azimuth_deg=self.azimuth_deg) / free
        if self.rows is None:
            return first
        masking = np.radians(max(self.rows.masking_deg(self.tilt_deg), 0.0))
        ahead = np.maximum(np.cos(np.radians(around - self.azimuth_deg)), 0.0)
        edge = np.degrees(np.arctan2(np.sin(masking) * ahead, np.cos(masking)))
        other = sky_view(np.maximum(skyline, edge), tilt_deg=self.tilt_deg, azimuth_deg=self.azimuth_deg) / free
        return first + self.rows.behind * (other - first)

    @property
    def ground_open(self) -> float:
        """Share of the light from the ground that is left, as the field's mean."""
        return 1.0 if self.rows is None else 1.0 - self.rows.behind * (1.0 - self.rows.ground_share(self.tilt_deg))


def _compass() -> Floats:
    return (np.arange(AROUND, dtype=float) + 0.5) * (360.0 / AROUND)


def sky_view(skyline_deg: Floats, *, tilt_deg: float, azimuth_deg: float) -> float:
    """View factor of a tilted plane to the sky above a skyline.

    Parameters
    ----------
    skyline_deg
        Elevation below which there is no sky, at the middles of equal parts of the compass from north, ``(k,)`` [deg].
    tilt_deg, azimuth_deg
        Of the plane [deg].

    Returns
    -------
    float
        (1 + cos tilt) / 2 without obstacles.

    Notes
    -----
    **Source**: definition of the view factor; over elevation in closed form, over azimuth as a sum.
    """
    tilt = np.radians(tilt_deg)
    around = (np.arange(len(skyline_deg)) + 0.5) * (360.0 / len(skyline_deg))
    across = np.sin(tilt) * np.cos(np.radians(around - azimuth_deg))
    own = np.arctan2(-across, np.cos(tilt))  # the plane's own edge, where it cuts the sky
    low = np.maximum(np.maximum(np.radians(skyline_deg), own), 0.0)
    upward = 0.5 * np.cos(tilt) * np.cos(low) ** 2
    sideward = across * (0.5 * (0.5 * np.pi - low) - 0.25 * np.sin(2.0 * low))
    return float(2.0 * (upward + sideward).mean())


def open_beam(obstacles: Obstacles, *, weather: WeatherYear, sun: Sun, lit: Floats) -> Floats:
    """Share of each hour's beam that comes past the obstacles.

    Parameters
    ----------
    obstacles
        Before the plane.
    weather, sun
        n hours, the sun at their middle.
    lit
        Beam on the plane, ``(n,)``; hours without are left out.

    Returns
    -------
    ndarray
        ``(n,)``, 0 to 1; 1 in hours without beam.
    """
    share = np.ones(len(weather))
    hours = np.flatnonzero(lit > 0.0)
    half = np.timedelta64(1800, "s")
    before, after = (sun_at(weather.time_mid + shift, site=weather.site) for shift in (-half, half))
    ends = [_direction(each)[:, hours] for each in (before, sun, after)]
    at = ((np.arange(PARTS) + 0.5) * 2.0 / PARTS - 1.0)[:, np.newaxis]
    weights = (0.5 * at * (at - 1.0), 1.0 - at * at, 0.5 * at * (at + 1.0))
    east, north, up = (sum(w * end[axis] for w, end in zip(weights, ends, strict=True)) for axis in range(3))
    azimuth, tilt = np.radians(obstacles.azimuth_deg), np.radians(obstacles.tilt_deg)
    ahead = east * np.sin(azimuth) + north * np.cos(azimuth)  # towards where the plane faces
    falls = np.where(up > 0.0, np.maximum(up * np.cos(tilt) + ahead * np.sin(tilt), 0.0), 0.0)
    comes = falls
    if obstacles.horizon is not None:
        skyline = obstacles.horizon.elevation(np.degrees(np.arctan2(east, north)))
        comes = np.where(np.degrees(np.arctan2(up, np.hypot(east, north))) > skyline, comes, 0.0)
    if obstacles.rows is not None:
        profile = np.degrees(np.arctan2(up, ahead))
        comes = comes * (1.0 - obstacles.rows.behind * obstacles.rows.shaded(profile, tilt_deg=obstacles.tilt_deg))
    whole = falls.sum(axis=0)
    share[hours] = np.where(whole > 0.0, comes.sum(axis=0) / np.maximum(whole, 1e-12), 1.0)
    return share


def _direction(sun: Sun) -> Floats:
    """East, north and up of the sun, ``(3, n)``."""
    zenith, azimuth = np.radians(sun.apparent_zenith_deg), np.radians(sun.azimuth_deg)
    return np.array([np.sin(zenith) * np.sin(azimuth), np.sin(zenith) * np.cos(azimuth), np.cos(zenith)])


def behind(obstacles: Obstacles, free: PlaneIrradiance, *, weather: WeatherYear, sun: Sun) -> PlaneIrradiance:
    """Sunlight that comes past the obstacles.

    Parameters
    ----------
    obstacles
        Before the plane.
    free
        Sunlight on it without them, n hours.
    weather, sun
        The same hours, the sun at their middle.

    Returns
    -------
    PlaneIrradiance
        No component is more than before.
    """
    sky, ground = min(obstacles.sky_open, 1.0), obstacles.ground_open
    beam = free.beam * open_beam(obstacles, weather=weather, sun=sun, lit=free.beam)
    return PlaneIrradiance(
        beam=beam,
        sky=free.sky * sky,
        horizon=free.horizon * sky,
        ground=free.ground * ground,
        incidence_deg=free.incidence_deg,
        notices=(*free.notices, *_of_the_field(obstacles.rows)),
    )


def _of_the_field(rows: Rows | None) -> tuple[str, ...]:
    if rows is None or rows.count == 1:
        return ()
    said = (
        f"{rows.count} rows computed as one collector in their mean sunlight: the first, with none in front, gets more"
    )
    return (f"{said} and is hotter when it stands still",)
