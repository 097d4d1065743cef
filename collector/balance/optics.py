"""Sunlight on the plane to power absorbed in the plate and in each cover."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from collector.build.collector import Collector
from collector.physics.glazing import (
    Stack,
    brandemuehl_beckman_1980,
    flat_black_absorptance,
    fresnel_slab,
    stack_of_slabs,
)
from weather.plane import PlaneIrradiance
from weather.year import Floats, Mask

__all__ = ["Absorbed", "Optics", "absorbed_power", "optics_of"]

EFFECTIVE_ANGLE_BENEATH = 60.0  # deg, of light the plate scatters back; Duffie & Beckman, Sec. 5.4


@dataclass(frozen=True, kw_only=True)
class Absorbed:
    """Absorbed sunlight: in the plate ``(n,)`` and in each cover ``(covers, n)`` [W/m2]."""

    plate: Floats
    covers: Floats

    def at(self, hours: Mask | NDArray[np.intp]) -> Absorbed:
        """Return the same for some of the hours."""
        return Absorbed(plate=self.plate[hours], covers=self.covers[:, hours])


@dataclass(frozen=True, kw_only=True)
class Optics:
    """Shares of the light on the plane that plate and covers absorb.

    Parameters
    ----------
    beam
        Function of the angle of incidence ``(n,)`` [deg], returning ``(1 + covers, n)``: the plate first.
    sky, horizon, ground
        The same shares for each diffuse component, ``(1 + covers,)``.
    """

    beam: Callable[[Floats], Floats]
    sky: Floats
    horizon: Floats
    ground: Floats


def absorbed_power(optics: Optics, plane: PlaneIrradiance) -> Absorbed:
    """Sunlight absorbed in every hour.

    Parameters
    ----------
    optics
        Of the collector.
    plane
        Irradiance on its plane by component, n hours.

    Returns
    -------
    Absorbed
        Plate and covers [W/m2].
    """
    lit = np.flatnonzero(plane.beam > 0.0)
    power = (
        np.outer(optics.sky, plane.sky)
        + np.outer(optics.horizon, plane.horizon)
        + np.outer(optics.ground, plane.ground)
    )
    power[:, lit] += optics.beam(plane.incidence_deg[lit]) * plane.beam[lit]
    return Absorbed(plate=power[0], covers=power[1:])


def optics_of(collector: Collector) -> Optics:
    """Optics of covers and plate together.

    The plate scatters what it does not absorb; the covers send part of that back, and absorb part of it.

    Parameters
    ----------
    collector
        As built.

    Returns
    -------
    Optics
        For beam at any angle and for the three diffuse components.
    """
    beneath = _beneath(collector)

    def shares(incidence_deg: Floats) -> Floats:
        return _shares(collector, incidence_deg, beneath=beneath)

    angles = _integrated if collector.integrated_diffuse else _at_effective_angle
    sky, horizon, ground = angles(shares, tilt_deg=collector.tilt_deg)
    return Optics(beam=shares, sky=sky, horizon=horizon, ground=ground)


def _stack(collector: Collector, incidence_deg: Floats) -> Stack:
    slabs = [
        fresnel_slab(incidence_deg, refractive_index=c.refractive_index, absorption=c.absorption)
        for c in collector.covers
    ]
    if slabs:
        return stack_of_slabs(slabs)
    ones, none = np.ones_like(incidence_deg), np.zeros((0, incidence_deg.size))
    return Stack(ones, none, np.zeros_like(incidence_deg), none)


def _plate_absorptance(collector: Collector, incidence_deg: Floats) -> Floats:
    falls = flat_black_absorptance(incidence_deg) if collector.falling_absorptance else np.ones_like(incidence_deg)
    return collector.absorber.absorptance * falls


def _beneath(collector: Collector) -> Floats:
    """Plate's gain and covers' shares, per unit of light that the plate scatters: ``(1 + covers,)``."""

    def from_below(incidence_deg: Floats) -> Floats:
        stack = _stack(collector, incidence_deg)
        return np.vstack([_plate_absorptance(collector, incidence_deg), stack.reflectance_below, stack.absorbed_below])

    if collector.integrated_diffuse:
        alpha, reflected, *absorbed = _whole_hemisphere(from_below)
    else:
        alpha, reflected, *absorbed = from_below(np.array([EFFECTIVE_ANGLE_BENEATH]))[:, 0]
    echoes = 1.0 / (1.0 - (1.0 - alpha) * reflected)
    return np.array([reflected * alpha, *absorbed]) * float(echoes)


def _shares(collector: Collector, incidence_deg: Floats, *, beneath: Floats) -> Floats:
    stack, alpha = _stack(collector, incidence_deg), _plate_absorptance(collector, incidence_deg)
    first = np.vstack([alpha * stack.transmittance, stack.absorbed])
    return np.asarray(first + np.outer(beneath, stack.transmittance * (1.0 - alpha)))


def _at_effective_angle(shares: Callable[[Floats], Floats], *, tilt_deg: float) -> tuple[Floats, Floats, Floats]:
    sky, ground = brandemuehl_beckman_1980(tilt_deg)
    horizon = math.degrees(math.acos(math.sin(math.radians(tilt_deg)) * math.pi / 4.0))
    at = shares(np.array([sky, horizon, ground]))
    return at[:, 0], at[:, 1], at[:, 2]


def _integrated(shares: Callable[[Floats], Floats], *, tilt_deg: float) -> tuple[Floats, Floats, Floats]:
    """Isotropic sky and ground over their part of the hemisphere, horizon brightening along the horizon's line."""
    theta, weight = _hemisphere()
    tilt = math.radians(tilt_deg)
    above, across = math.cos(tilt) * np.cos(theta), math.sin(tilt) * np.sin(theta)
    sky_part = np.arccos(np.clip(-above / np.maximum(across, 1e-12), -1.0, 1.0)) / math.pi
    values = shares(np.degrees(theta))
    around = (np.arange(256) + 0.5) / 256.0 * (math.pi / 2.0)
    line = shares(np.degrees(np.arccos(math.sin(tilt) * np.cos(around))))
    ground = weight * (1.0 - sky_part)
    return (
        _mean(values, weight * sky_part),
        _mean(line, np.cos(around)),
        _mean(values, ground) if ground.any() else shares(np.array([90.0]))[:, 0],  # lying flat: grazing light at most
    )


def _whole_hemisphere(function: Callable[[Floats], Floats]) -> Floats:
    theta, weight = _hemisphere()
    return _mean(function(np.degrees(theta)), weight)


def _hemisphere() -> tuple[Floats, Floats]:
    theta = (np.arange(512, dtype=float) + 0.5) / 512.0 * (math.pi / 2.0)
    return theta, np.sin(theta) * np.cos(theta)


def _mean(values: Floats, weight: Floats) -> Floats:
    return np.asarray(values @ (weight / weight.sum()))
