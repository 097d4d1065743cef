"""Heat carried by gas and liquid: air gaps, wind, and the film inside a tube."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from weather.year import Floats

__all__ = [
    "Air",
    "air",
    "elsherbiny_1982",
    "gap_nusselt",
    "gnielinski_1976",
    "hollands_1976",
    "jayamaha_1996",
    "laminar_entry_tube",
    "mcadams_1954",
    "mitchell_1976",
    "tube_nusselt",
    "watmuff_1977",
]

STANDARD_PRESSURE = 101_325.0  # Pa
GRAVITY = 9.80665  # m/s2
GAS_CONSTANT_AIR = 287.055  # J/kgK, dry air


class Air(NamedTuple):
    """Dry air in a gap: conductivity [W/mK] and its slope [W/mK2], Rayleigh number per K and m3 and its log's slope [1/K]."""

    conductivity: Floats
    conductivity_slope: Floats
    rayleigh: Floats
    rayleigh_log_slope: Floats


def air_conductivity(t: Floats) -> Floats:
    """Thermal conductivity of dry air.

    Parameters
    ----------
    t
        Temperature, 200 to 560 K, any shape [K].

    Returns
    -------
    ndarray
        [W/mK], within 0.05 % of the source.

    Notes
    -----
    **Source**: our cubic fit to Lemmon & Jacobsen, Int. J. Thermophysics 25 (2004) 21, at 1 atm.
    """
    x = t / 300.0
    return ((9.80276e-4 * x - 6.559526e-3) * x + 3.248843e-2) * x - 5.2476e-4


def air_viscosity(t: Floats) -> Floats:
    """Dynamic viscosity of dry air.

    Parameters
    ----------
    t
        Temperature, 200 to 560 K, any shape [K].

    Returns
    -------
    ndarray
        [Pa s], within 0.05 % of the source.

    Notes
    -----
    **Source**: our cubic fit to Lemmon & Jacobsen (2004), at 1 atm.
    """
    x = t / 300.0
    return ((8.345159e-7 * x - 5.550318e-6) * x + 2.30805e-5) * x + 1.725752e-7


def air_heat_capacity(t: Floats) -> Floats:
    """Isobaric heat capacity of dry air.

    Parameters
    ----------
    t
        Temperature, 200 to 560 K, any shape [K].

    Returns
    -------
    ndarray
        [J/kgK], within 0.06 % of the source.

    Notes
    -----
    **Source**: our quadratic fit to Lemmon et al., J. Phys. Chem. Ref. Data 29 (2000) 331, at 1 atm.
    """
    x = t / 300.0
    return (35.16308 * x - 58.92965) * x + 1030.228


def air(t: Floats, *, pressure: float) -> Air:
    """What an air gap needs to know of its air, with the slopes that a Newton step wants.

    Parameters
    ----------
    t
        Mean temperature of the gap, shape ``(n,)`` [K].
    pressure
        [Pa]

    Returns
    -------
    Air
        Conductivity [W/mK] with its slope [W/mK2], and the Rayleigh number per kelvin and cubic metre,
        g rho^2 cp / (T mu k) for an ideal gas [1/Km3], with the slope of its logarithm [1/K]; within 0.5 % of real air from
        260 to 400 K, 1.4 % below it at 200 K.
    """
    x = t / 300.0
    k, mu, cp = air_conductivity(t), air_viscosity(t), air_heat_capacity(t)
    k_slope = ((3 * 9.80276e-4 / 300) * x - 2 * 6.559526e-3 / 300) * x + 3.248843e-2 / 300
    mu_slope = ((3 * 8.345159e-7 / 300) * x - 2 * 5.550318e-6 / 300) * x + 2.30805e-5 / 300
    cp_slope = (2 * 35.16308 / 300) * x - 58.92965 / 300
    rayleigh = (GRAVITY * (pressure / GAS_CONSTANT_AIR) ** 2) * cp / (t * t * t * mu * k)
    return Air(k, k_slope, rayleigh, cp_slope / cp - mu_slope / mu - k_slope / k - 3.0 / t)


def hollands_1976(rayleigh: Floats, *, tilt_deg: float) -> tuple[Floats, Floats]:
    """Nusselt number of a tilted air layer heated from below.

    Parameters
    ----------
    rayleigh
        Rayleigh number on the gap's thickness, shape ``(n,)``; 0 and below is still gas.
    tilt_deg
        0 to 75 [deg].

    Returns
    -------
    tuple of ndarray
        Nusselt number and its slope d Nu / d ln Ra, each ``(n,)``.

    Notes
    -----
    **Source**: Hollands, Unny, Raithby & Konicek, J. Heat Transfer 98 (1976) 189. Ra below 1e5, length over gap 12 or
    more. The slope has kinks at Ra cos(tilt) = 1708 and 5830, as published.
    """
    tilt = math.radians(tilt_deg)
    lean = math.sin(1.8 * tilt) ** 1.6 if tilt_deg <= 100.0 else 0.0
    x = np.maximum(rayleigh * math.cos(tilt), 1708.0)
    critical = 1708.0 / x
    root = np.cbrt(np.maximum(x * (1.0 / 5830.0), 1.0))
    rise, damped = 1.0 - critical, 1.0 - lean * critical
    nusselt = 1.44 * rise * damped + root
    slope = (1.44 * critical) * (damped + lean * rise) * (rise > 0.0) + root * ((1.0 / 3.0) * (root > 1.0))
    return nusselt, slope


def elsherbiny_1982(rayleigh: Floats, *, tilt_deg: float, aspect: float) -> tuple[Floats, Floats]:
    """Nusselt number of a steep or vertical air layer heated from below or from the side.

    Parameters
    ----------
    rayleigh
        Rayleigh number on the gap's thickness, shape ``(n,)``.
    tilt_deg
        60 to 90; below 60 the relation for 60 is used [deg].
    aspect
        Length of the layer over its thickness, 5 to 110.

    Returns
    -------
    tuple of ndarray
        Nusselt number and its slope d Nu / d ln Ra, each ``(n,)``; linear in tilt between 60 and 90 degrees.

    Notes
    -----
    **Source**: ElSherbiny, Raithby & Hollands, J. Heat Transfer 104 (1982) 96 (coefficients from memory).
    """
    log_ra = np.log(np.maximum(rayleigh, 1.0))
    share = min(max((tilt_deg - 60.0) / 30.0, 0.0), 1.0)
    return _between(_sixty_degrees(log_ra, aspect=aspect), _vertical(log_ra, aspect=aspect), share=share)


def _between(first: tuple[Floats, Floats], second: tuple[Floats, Floats], *, share: float) -> tuple[Floats, Floats]:
    """Value and slope a share of the way from the first to the second."""
    return first[0] + share * (second[0] - first[0]), first[1] + share * (second[1] - first[1])


def _vertical(log_ra: Floats, *, aspect: float) -> tuple[Floats, Floats]:
    """0.104 Ra^0.293 / (1 + (6310/Ra)^1.36) cubed and added to 1, to the 1/3; 0.242 (Ra/A)^0.272; 0.0605 Ra^(1/3): the largest."""
    z = np.exp(1.36 * (math.log(6310.0) - log_ra))
    cube = np.exp(3.0 * (math.log(0.104) + 0.293 * log_ra)) / (1.0 + z) ** 3
    laminar = np.exp(np.log1p(cube) / 3.0)
    laminar_slope = laminar * cube / (1.0 + cube) * (0.293 + 1.36 * z / (1.0 + z))
    tall, turbulent = (0.242 * aspect**-0.272) * np.exp(0.272 * log_ra), 0.0605 * np.exp(log_ra / 3.0)
    return _largest((laminar, laminar_slope), (tall, 0.272 * tall), (turbulent, turbulent / 3.0))


def _sixty_degrees(log_ra: Floats, *, aspect: float) -> tuple[Floats, Floats]:
    """(1 + (0.0936 Ra^0.314 / (1 + G))^7)^(1/7), G = 0.5/(1 + (Ra/3160)^20.6)^0.1; (0.104 + 0.175/A) Ra^0.283: the largest."""
    z = np.exp(np.minimum(20.6 * (log_ra - math.log(3160.0)), 600.0))
    g = 0.5 * np.exp(-0.1 * np.log1p(z))
    seventh = np.exp(7.0 * (math.log(0.0936) + 0.314 * log_ra - np.log1p(g)))
    low = np.exp(np.log1p(seventh) / 7.0)
    low_slope = low * seventh / (1.0 + seventh) * (0.314 + 2.06 * z / (1.0 + z) * g / (1.0 + g))
    high = (0.104 + 0.175 / aspect) * np.exp(0.283 * log_ra)
    return _largest((low, low_slope), (high, 0.283 * high))


def _largest(first: tuple[Floats, Floats], *others: tuple[Floats, Floats]) -> tuple[Floats, Floats]:
    value, slope = first
    for other, other_slope in others:
        above = other > value
        value, slope = np.where(above, other, value), np.where(above, other_slope, slope)
    return value, slope


def gap_nusselt(rayleigh: Floats, *, tilt_deg: float, aspect: float) -> tuple[Floats, Floats]:
    """Nusselt number of a collector's air gap at any tilt, heated from either side.

    Hollands et al. up to 55 degrees and ElSherbiny et al. from 65; between them a smooth blend, because the two differ by
    some 6 % at 60 degrees. Heated from above the gas is still up to 60 degrees; from there the share that moves grows in a straight
    line to the vertical, where above and below are the same (our joining rule, no source).

    Parameters
    ----------
    rayleigh
        Positive where the lower face is the hotter one, negative where the upper is, shape ``(n,)``.
    tilt_deg
        0 to 90 [deg].
    aspect
        Length of the layer over its thickness.

    Returns
    -------
    tuple of ndarray
        Nusselt number and its slope d Nu / d ln Ra, each ``(n,)``.
    """
    s = min(max((tilt_deg - 55.0) / 10.0, 0.0), 1.0)
    steep = s * s * (3.0 - 2.0 * s)
    if steep == 0.0:
        return hollands_1976(rayleigh, tilt_deg=tilt_deg)
    log_ra = np.log(np.maximum(np.abs(rayleigh), 1.0))
    moving = max(tilt_deg - 60.0, 0.0) / 30.0
    relation = _sixty_degrees(log_ra, aspect=aspect)
    if moving > 0.0:
        upright = _vertical(log_ra, aspect=aspect)
        relation = _between(relation, upright, share=moving)
    if steep < 1.0:
        relation = _between(hollands_1976(rayleigh, tilt_deg=tilt_deg), relation, share=steep)
    still = np.ones_like(log_ra), np.zeros_like(log_ra)
    above = _between(still, upright, share=moving) if moving > 0.0 else still
    below = rayleigh > 0.0
    return np.where(below, relation[0], above[0]), np.where(below, relation[1], above[1])


class Wind(NamedTuple):
    """A published wind relation, the range it was found in [m/s], and where it stands."""

    coefficient: Callable[..., Floats]
    limit: float
    source: str


def watmuff_1977(wind: Floats) -> Floats:
    """Wind coefficient 2.8 + 3.0 V.

    Parameters
    ----------
    wind
        Speed at the collector, shape ``(n,)`` [m/s].

    Returns
    -------
    ndarray
        [W/m2K]. Range of the wind tunnel: 0 to 7 m/s (from memory).

    Notes
    -----
    **Source**: Watmuff, Charters & Proctor, COMPLES 2 (1977) 56; Duffie & Beckman, Eq. 3.15.3.
    """
    return 2.8 + 3.0 * wind


def mcadams_1954(wind: Floats) -> Floats:
    """Wind coefficient 5.7 + 3.8 V, which holds some radiation already.

    Parameters
    ----------
    wind
        Speed at the collector, shape ``(n,)`` [m/s].

    Returns
    -------
    ndarray
        [W/m2K]. Range 0 to 5 m/s.

    Notes
    -----
    **Source**: McAdams, Heat Transmission, 3rd ed. (1954), after Juerges.
    """
    return 5.7 + 3.8 * wind


def mitchell_1976(wind: Floats, *, building_length: float) -> Floats:
    """Wind coefficient of a collector on a building, max(5, 8.6 V^0.6 / L^0.4).

    Parameters
    ----------
    wind
        Speed, shape ``(n,)`` [m/s].
    building_length
        Cube root of the building's volume [m].

    Returns
    -------
    ndarray
        [W/m2K]

    Notes
    -----
    **Source**: Mitchell, J. Heat Transfer 98 (1976) 1, in Duffie & Beckman, Eq. 3.15.10.
    """
    return np.asarray(np.maximum(5.0, 8.6 * wind**0.6 / building_length**0.4))


def jayamaha_1996(wind: Floats) -> Floats:
    """Wind coefficient of the middle of a large wall, the straight line from 6 at calm to 10 W/m2K at 4 m/s.

    Parameters
    ----------
    wind
        Speed at the wall, shape ``(n,)`` [m/s].

    Returns
    -------
    ndarray
        [W/m2K]. Range 0 to 4 m/s.

    Notes
    -----
    **Source**: Jayamaha, Wijeysundera & Chou, Building and Environment 31 (1996) 399: the two ends of the measured range;
    the line between them is ours.
    """
    return 6.0 + 1.0 * wind


WIND_RELATIONS = {
    "watmuff": Wind(watmuff_1977, 7.0, "2.8 + 3.0 V; Watmuff, Charters & Proctor 1977, COMPLES 2, 56"),
    "mcadams": Wind(mcadams_1954, 5.0, "5.7 + 3.8 V; McAdams 1954, Heat Transmission; holds some radiation already"),
    "mitchell": Wind(
        mitchell_1976, math.inf, "max(5, 8.6 V^0.6/L^0.4), L a building's length; Mitchell 1976, J. Heat Transfer 98, 1"
    ),
    "jayamaha": Wind(
        jayamaha_1996, 4.0, "6 + V, middle of a large wall; Jayamaha et al. 1996, Building and Environment 31, 399"
    ),
}


def laminar_entry_tube(*, reynolds: Floats, prandtl: Floats, slenderness: float) -> Floats:
    """Mean Nusselt number of laminar flow in a tube with uniform heat flux, both profiles developing from the inlet.

    Parameters
    ----------
    reynolds, prandtl
        Shape ``(n,)``.
    slenderness
        Inner diameter over length.

    Returns
    -------
    ndarray
        Mean over the length, ``(n,)``; 4.364 in a long tube.

    Notes
    -----
    **Source**: Gnielinski, VDI Heat Atlas, 2nd ed. (2010), ch. G1, Sec. 4 (coefficients from memory); limit 48/11 of Shah &
    London (1978).
    """
    thermal = 1.953 * np.cbrt(reynolds * prandtl * slenderness)
    both = 0.924 * np.cbrt(prandtl) * np.sqrt(reynolds * slenderness)
    return np.asarray(np.cbrt(4.364**3 + 0.6**3 + (thermal - 0.6) ** 3 + both**3))


def gnielinski_1976(*, reynolds: Floats, prandtl: Floats) -> Floats:
    """Nusselt number of developed turbulent flow in a smooth tube.

    Parameters
    ----------
    reynolds, prandtl
        Shape ``(n,)``.

    Returns
    -------
    ndarray
        With Petukhov's friction factor (0.79 ln Re - 1.64)^-2, ``(n,)``.

    Notes
    -----
    **Source**: Gnielinski, Int. Chem. Eng. 16 (1976) 359; Re 3000 to 5e6, Pr 0.5 to 2000.
    """
    friction = (0.79 * np.log(reynolds) - 1.64) ** -2
    above = friction / 8.0 * (reynolds - 1000.0) * prandtl
    return np.asarray(above / (1.0 + 12.7 * np.sqrt(friction / 8.0) * (np.cbrt(prandtl) ** 2 - 1.0)))


def tube_nusselt(*, reynolds: Floats, prandtl: Floats, slenderness: float) -> Floats:
    """Mean Nusselt number in a tube at any flow.

    Laminar with entry effect up to Re 2300, turbulent from 10 000, between them linear in Re from the one end to the other.

    Parameters
    ----------
    reynolds, prandtl
        Shape ``(n,)``.
    slenderness
        Inner diameter over length.

    Returns
    -------
    ndarray
        Mean over the length, ``(n,)``.

    Notes
    -----
    **Source**: the blend and the entry factor 1 + (d/L)^(2/3) are those of Gnielinski, VDI Heat Atlas, ch. G1.
    """
    lower, upper = np.minimum(reynolds, 2300.0), np.maximum(reynolds, 10_000.0)
    laminar = laminar_entry_tube(reynolds=lower, prandtl=prandtl, slenderness=slenderness)
    turbulent = gnielinski_1976(reynolds=upper, prandtl=prandtl) * (1.0 + slenderness ** (2.0 / 3.0))
    share = np.clip((reynolds - 2300.0) / 7700.0, 0.0, 1.0)
    return np.asarray(laminar + share * (turbulent - laminar))
