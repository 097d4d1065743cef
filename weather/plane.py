"""Sunlight on a tilted plane, by where it comes from."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from weather.sun import Sun
from weather.year import Floats, Mask, WeatherYear

__all__ = ["MODELS", "PlaneIrradiance", "on_plane"]

MODELS = {
    "perez-driesse": "continuous form of Perez et al. 1990; Driesse, Jensen & Perez 2024, Solar Energy 267, 112093",
    "perez": "all-sites composite 1990; Perez et al. 1990, Solar Energy 44, 271",
    "hay-davies": "isotropic and circumsolar; Hay & Davies 1980",
    "isotropic": "uniform sky; Liu & Jordan 1963, Solar Energy 7, 53",
}


@dataclass(frozen=True, kw_only=True)
class PlaneIrradiance:
    """Irradiance on the plane by component, each ``(n,)`` [W/m2].

    Parameters
    ----------
    beam
        Direct, with the circumsolar part of the diffuse.
    sky
        Isotropic part; takes what a Perez model subtracts at the horizon.
    horizon
        Brightening along the horizon, never negative.
    ground
        Reflected from the ground.
    incidence_deg
        Angle between beam and normal, 0 to 90 [deg].
    notices
        What was clipped or mended, with counts.
    """

    beam: Floats
    sky: Floats
    horizon: Floats
    ground: Floats
    incidence_deg: Floats
    notices: tuple[str, ...]

    @property
    def total(self) -> Floats:
        """All components [W/m2]."""
        return self.beam + self.sky + self.horizon + self.ground


def on_plane(
    weather: WeatherYear, sun: Sun, *, tilt_deg: float, azimuth_deg: float, albedo: float | Floats, model: str
) -> PlaneIrradiance:
    """Sunlight on the plane in every hour.

    Parameters
    ----------
    weather, sun
        n hours, the sun at their middle.
    tilt_deg, azimuth_deg
        From the horizontal; clockwise from north [deg].
    albedo
        Ground reflectance, one or ``(n,)``.
    model
        A key of ``MODELS``.

    Returns
    -------
    PlaneIrradiance
        No component is negative. With the sun below the horizon at mid-hour the beam is dropped and the diffuse kept.
    """
    cosine = _cos_incidence(sun, tilt_deg=tilt_deg, azimuth_deg=azimuth_deg)
    zenith = sun.apparent_zenith_deg
    up = zenith < 90.0
    seen = up & (cosine > 0.0)
    sky, circumsolar, horizon, mended = _diffuse(weather, sun, tilt_deg=tilt_deg, azimuth_deg=azimuth_deg, model=model)
    brightening = np.maximum(horizon, 0.0)
    sky = sky + horizon - brightening
    ground = weather.ghi * albedo * 0.5 * (1.0 - np.cos(np.radians(tilt_deg)))
    behind = np.where(seen, 0.0, circumsolar)
    return PlaneIrradiance(
        beam=np.where(seen, weather.dni * np.maximum(cosine, 0.0) + circumsolar, 0.0),
        sky=np.maximum(sky + behind, 0.0),
        horizon=brightening,
        ground=np.asarray(ground),
        incidence_deg=np.degrees(np.arccos(np.clip(cosine, 0.0, 1.0))),
        notices=_notices(weather, up=up, sky=sky + behind, mended=mended, model=model),
    )


def _cos_incidence(sun: Sun, *, tilt_deg: float, azimuth_deg: float) -> Floats:
    """Cosine of the angle between beam and normal; Duffie & Beckman, Eq. 1.6.3."""
    zenith, tilt = np.radians(sun.apparent_zenith_deg), np.radians(tilt_deg)
    turn = np.radians(sun.azimuth_deg - azimuth_deg)
    return np.asarray(np.cos(zenith) * np.cos(tilt) + np.sin(zenith) * np.sin(tilt) * np.cos(turn))


def _diffuse(
    weather: WeatherYear, sun: Sun, *, tilt_deg: float, azimuth_deg: float, model: str
) -> tuple[Floats, Floats, Floats, int]:
    """Isotropic, circumsolar and horizon part of the sky's diffuse on the plane, and how many hours the model left open."""
    from pvlib import irradiance

    plain = np.asarray(irradiance.isotropic(tilt_deg, weather.dhi))
    none = np.zeros_like(plain)
    if model == "isotropic":
        return plain, none, none, 0
    angles = {
        "surface_tilt": tilt_deg,
        "surface_azimuth": azimuth_deg,
        "dhi": weather.dhi,
        "dni": weather.dni,
        "dni_extra": sun.dni_extra,
        "solar_zenith": sun.apparent_zenith_deg,
        "solar_azimuth": sun.azimuth_deg,
        "return_components": True,
    }
    if model == "hay-davies":
        parts = irradiance.haydavies(**angles) | {"poa_horizon": none}
    else:
        from pvlib.atmosphere import get_relative_airmass

        airmass = get_relative_airmass(sun.apparent_zenith_deg)
        relation = irradiance.perez if model == "perez" else irradiance.perez_driesse
        parts = relation(**angles, airmass=airmass)
    found = [np.asarray(parts[f"poa_{name}"], dtype=float) for name in ("isotropic", "circumsolar", "horizon")]
    open_hours = ~np.isfinite(sum(found))
    lit = open_hours & (weather.dhi > 0.0)
    values = [np.where(open_hours, 0.0, part) for part in found]
    values[0] = np.where(lit, plain, values[0])
    above = sun.apparent_zenith_deg < 90.0
    return values[0], values[1], values[2], int(np.count_nonzero(lit & above))


def _notices(weather: WeatherYear, *, up: Mask, sky: Floats, mended: int, model: str) -> tuple[str, ...]:
    dark = (weather.ghi > 0.0) & ~up
    energy, share = weather.ghi[dark].sum() / 1e3, weather.ghi[dark].sum() / max(weather.ghi.sum(), 1e-9)
    negative = int(np.count_nonzero(sky < -0.5))
    said = []
    if dark.any():
        said.append(
            f"{np.count_nonzero(dark)} h have sunlight while the sun is below the horizon at mid-hour "
            f"({energy:.1f} kWh/m2 horizontal, {100 * share:.2f} %): diffuse kept, beam dropped"
        )
    if mended:
        said.append(f"{mended} h have no value in the sky model '{model}': isotropic sky used there")
    if negative:
        said.append(f"{negative} h have a negative sky part in the model '{model}': set to 0")
    return tuple(said)
