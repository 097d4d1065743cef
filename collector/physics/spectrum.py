"""What an opaque surface absorbs of sunlight and radiates by itself, from its reflectance over wavelength."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from scipy.constants import c, h, k
from scipy.special import bernoulli, zeta

from weather.year import Floats

__all__ = [
    "Absorbed",
    "Radiated",
    "Spectrum",
    "band_fraction",
    "cut_off",
    "emittance",
    "solar_absorptance",
]

SECOND_RADIATION = h * c / k  # m K
VISIBLE = 0.4e-6  # m, its short end
SERIES_SPLIT = 2.0  # of hc / (lambda k T): below it the series in powers, above it the one in exponentials
NARROW = 0.01  # of a wavelength: a segment below it is averaged by Simpson's rule, where the closed form would cancel


@dataclass(frozen=True, kw_only=True)
class Spectrum:
    """Reflectance of an opaque surface, in straight lines from point to point; beyond its ends the end value is held.

    Parameters
    ----------
    wavelength
        Rising, shape ``(n,)`` [m].
    reflectance
        0 to 1, shape ``(n,)``.
    """

    wavelength: Floats
    reflectance: Floats

    @property
    def absorptance(self) -> Floats:
        """What an opaque surface does not reflect; by Kirchhoff's law its emittance at that wavelength, ``(n,)``."""
        return 1.0 - self.reflectance


class Absorbed(NamedTuple):
    """Solar absorptance, the shares of the solar energy short and long of the measured range, and the bounds they leave."""

    value: float
    short: float
    long: float
    least: float
    most: float


class Radiated(NamedTuple):
    """Emittance, the shares of the black body's power short and long of the measured range, the bounds they leave; ``(m,)``."""

    value: Floats
    short: Floats
    long: Floats
    least: Floats
    most: Floats


def solar_absorptance(spectrum: Spectrum, *, wavelength: Floats, irradiance: Floats) -> Absorbed:
    """Absorptance weighted by a solar spectrum.

    Both are straight lines between their points; the product is integrated exactly on the grid of both together.

    Parameters
    ----------
    spectrum
        Of the surface; outside its range the end value is held.
    wavelength
        Of the solar spectrum, rising, shape ``(n,)`` [m].
    irradiance
        Of the sun per wavelength, shape ``(n,)``, in any unit.

    Returns
    -------
    Absorbed
        The value; the shares of the solar energy outside the measured range; the value with that share wholly reflected
        and wholly absorbed.

    Notes
    -----
    **Source**: definition, as in ASTM E903 (from memory). Held by ``tests/published/test_spectrum.py``.
    """
    first, last = spectrum.wavelength[0], spectrum.wavelength[-1]
    inside = (spectrum.wavelength > wavelength[0]) & (spectrum.wavelength < wavelength[-1])
    grid = np.union1d(wavelength, spectrum.wavelength[inside])
    sun = np.interp(grid, wavelength, irradiance)
    a = np.interp(grid, spectrum.wavelength, spectrum.absorptance)
    step = np.diff(grid)
    energy = 0.5 * step * (sun[:-1] + sun[1:])
    taken = step / 6.0 * (a[:-1] * (2.0 * sun[:-1] + sun[1:]) + a[1:] * (sun[:-1] + 2.0 * sun[1:]))
    whole = energy.sum()
    value, short, long = (
        float(part / whole) for part in (taken.sum(), energy[grid[1:] <= first].sum(), energy[grid[:-1] >= last].sum())
    )
    least = value - short * float(spectrum.absorptance[0]) - long * float(spectrum.absorptance[-1])
    return Absorbed(value, short, long, max(least, 0.0), min(least + short + long, 1.0))


def band_fraction(lambda_t: Floats) -> Floats:
    """Share of a black body's power at wavelengths below a given one.

    Parameters
    ----------
    lambda_t
        Wavelength times temperature, 0 to infinity, any shape [m K].

    Returns
    -------
    ndarray
        0 to 1, in the same shape, to 1e-12.

    Notes
    -----
    **Source**: series in exponentials: Chang & Rhee, Int. Comm. Heat Mass Transfer 11 (1984) 451; in powers, through
    Bernoulli's numbers, for long wavelengths: Siegel & Howell, Thermal Radiation Heat Transfer, Appendix A (both from
    memory). The two meet to 1e-12.
    """
    return np.minimum(_tail(lambda_t, power=3) * (15.0 / math.pi**4), 1.0)


def _tail(lambda_t: Floats, *, power: int) -> Floats:
    """Integral of u^power / (exp u - 1) from u = hc/(lambda k T) to infinity."""
    x = SECOND_RADIATION / np.maximum(np.asarray(lambda_t, dtype=float), 1e-9)
    result = np.empty_like(x)
    near = x < SERIES_SPLIT
    result[near] = _tail_near(x[near], power=power)
    result[~near] = _tail_far(np.minimum(x[~near], 700.0), power=power)
    return np.asarray(result)


def _tail_near(x: Floats, *, power: int) -> Floats:
    """The whole integral less the one from 0 to x, from u/(exp u - 1) = sum of B_i u^i / i!."""
    whole = math.factorial(power) * float(zeta(power + 1))
    terms = [b / (math.factorial(i) * (i + power)) for i, b in enumerate(bernoulli(28))]
    return np.asarray(whole - x**power * np.polynomial.polynomial.polyval(x, terms))


def _tail_far(x: Floats, *, power: int) -> Floats:
    """1/(exp u - 1) = sum of exp(-i u), each integrated in closed form."""
    once = np.exp(-x)
    total, each = np.zeros_like(x), np.ones_like(x)
    for i in range(1, 17):
        each = each * once
        terms = [math.perm(power, power - j) / i ** (power - j + 1) for j in range(power + 1)]
        total += each * np.polynomial.polynomial.polyval(x, terms)
    return np.asarray(total)


def emittance(spectrum: Spectrum, *, t: Floats) -> Radiated:
    """Emittance at any temperatures: the absorptance weighted by Planck's curve.

    Integrated by parts, it is the absorptance at the long end less, for every segment, its rise times the segment's mean
    band fraction. That mean has a closed form, so nothing is discretised beyond the straight lines of the spectrum itself.

    Parameters
    ----------
    spectrum
        Of the surface; outside its range the end value is held.
    t
        Temperatures, shape ``(m,)`` [K].

    Returns
    -------
    Radiated
        The value; the shares of Planck's curve outside the measured range; the value with those shares not radiated at
        all and radiated as by a black body. Normal or hemispherical as the spectrum is.

    Notes
    -----
    **Source**: definition, e.g. Siegel & Howell, Thermal Radiation Heat Transfer, Ch. 3; closed form of the segments our own.
    """
    a, temperature = spectrum.absorptance, np.asarray(t, dtype=float)
    value = np.clip(a[-1] - _mean_fraction(spectrum.wavelength, t=temperature) @ np.diff(a), a.min(), a.max())
    short = band_fraction(spectrum.wavelength[0] * temperature)
    long = 1.0 - band_fraction(spectrum.wavelength[-1] * temperature)
    least = value - short * a[0] - long * a[-1]
    return Radiated(value, short, long, np.maximum(least, 0.0), np.minimum(least + short + long, 1.0))


def _mean_fraction(wavelength: Floats, *, t: Floats) -> Floats:
    """Band fraction averaged over each segment of the wavelengths, ``(m, n - 1)``."""
    y = t[:, None] * wavelength
    fraction = band_fraction(y)
    moment = _tail(y, power=2) * (15.0 / math.pi**4 * SECOND_RADIATION)
    mean = np.diff(y * fraction - moment, axis=1) / np.diff(y, axis=1)
    narrow = np.diff(wavelength) < NARROW * wavelength[1:]
    middle = band_fraction(0.5 * (y[:, :-1] + y[:, 1:])[:, narrow])
    mean[:, narrow] = (fraction[:, :-1][:, narrow] + 4.0 * middle + fraction[:, 1:][:, narrow]) / 6.0
    return np.asarray(mean)


def cut_off(spectrum: Spectrum) -> float | None:
    """Wavelength at which a selective surface turns from dark to bright.

    Parameters
    ----------
    spectrum
        Of the surface.

    Returns
    -------
    float or None
        Where reflectance, followed from 0.4 um on, first rises past 0.5 [m]; None if it never does.
    """
    r = spectrum.reflectance
    rising = (r[:-1] < 0.5) & (r[1:] >= 0.5) & (spectrum.wavelength[1:] > VISIBLE)
    if not rising.any():
        return None
    at = int(np.argmax(rising))
    share = (0.5 - r[at]) / (r[at + 1] - r[at])
    return float(spectrum.wavelength[at] + share * (spectrum.wavelength[at + 1] - spectrum.wavelength[at]))
