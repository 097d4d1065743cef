"""Sunlight through a stack of covers: Fresnel reflection and absorption, each polarisation by itself to the very end."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from weather.year import Floats

__all__ = [
    "Slab",
    "Stack",
    "brandemuehl_beckman_1980",
    "flat_black_absorptance",
    "fresnel_slab",
    "slab_from_normal",
    "stack_of_slabs",
]


class Slab(NamedTuple):
    """One cover, the same from both sides; arrays ``(2, n)``, the polarisation across and along the plane of incidence."""

    transmittance: Floats
    reflectance: Floats
    absorptance: Floats


class Stack(NamedTuple):
    """Covers one above the other with nothing beneath; arrays ``(n,)`` and ``(covers, n)``, polarisations averaged."""

    transmittance: Floats
    absorbed: Floats
    reflectance_below: Floats
    absorbed_below: Floats


def fresnel_slab(incidence_deg: Floats, *, refractive_index: float, absorption: float) -> Slab:
    """Transmittance, reflectance and absorptance of one smooth plane slab in air.

    All reflections inside the slab are summed without interference. Both polarisations are kept apart, because a second
    cover receives what the first has already polarised.

    Parameters
    ----------
    incidence_deg
        Angle in air between the light and the normal, 0 to 90, shape ``(n,)`` [deg].
    refractive_index
        Of the slab against air; 1 is a slab that does not reflect.
    absorption
        Extinction coefficient times thickness.

    Returns
    -------
    Slab
        At 90 degrees everything is reflected.

    Notes
    -----
    **Source**: Fresnel; Bouguer; Duffie & Beckman, Solar Engineering of Thermal Processes, Sec. 5.1-5.3. The form in
    cosines used here has no 0/0 at normal or grazing incidence.
    """
    cos_in = np.maximum(np.cos(np.radians(np.asarray(incidence_deg, dtype=float))), 1e-9)
    cos_out = np.sqrt(np.maximum(1.0 - (1.0 - cos_in * cos_in) / refractive_index**2, 1e-18))
    across = (cos_in - refractive_index * cos_out) / (cos_in + refractive_index * cos_out)
    along = (refractive_index * cos_in - cos_out) / (refractive_index * cos_in + cos_out)
    r = np.stack((across * across, along * along))
    a = np.exp(-absorption / cos_out)
    inside = 1.0 / (1.0 - (r * a) ** 2)
    transmittance = a * (1.0 - r) ** 2 * inside
    absorptance = (1.0 - r) * (1.0 - a) / (1.0 - r * a)
    return Slab(transmittance, 1.0 - transmittance - absorptance, absorptance)


def stack_of_slabs(slabs: Sequence[Slab]) -> Stack:
    """Optics of unlike covers one above the other, by adding one cover at a time beneath those already there.

    Parameters
    ----------
    slabs
        Outermost first, at least one.

    Returns
    -------
    Stack
        For light from above: transmittance and the share absorbed in each cover. For light from beneath: reflectance and
        the share absorbed in each cover. Averaged over the polarisations last.

    Notes
    -----
    **Source**: Edwards, Solar Energy 19 (1977) 401 and Siegel, Solar Energy 15 (1973) 109 give the same sums for partly
    transparent covers (from memory). Held against closed two-cover forms and an independent solution.
    """
    down, _, first = slabs[0]
    reflect_below = slabs[0].reflectance
    absorbed, absorbed_below = [first], [first]
    for t, r, a in slabs[1:]:
        between = 1.0 / (1.0 - reflect_below * r)
        up_again, down_again = down * r * between, t * reflect_below * between
        absorbed = [one + up_again * below for one, below in zip(absorbed, absorbed_below, strict=True)]
        absorbed_below = [t * between * below for below in absorbed_below]
        absorbed.append(down * between * a)
        absorbed_below.append(a + down_again * a)
        reflect_below = r + t * down_again
        down = down * t * between
    return Stack(
        down.mean(axis=0),
        np.stack(absorbed).mean(axis=1),
        reflect_below.mean(axis=0),
        np.stack(absorbed_below).mean(axis=1),
    )


def slab_from_normal(*, transmittance: float, reflectance: float) -> tuple[float, float]:
    """Refractive index and absorption that reproduce a cover's measured values at normal incidence.

    With r the reflectance of one face and a the transmission of one pass, the slab's sums give reflectance =
    r (1 + a transmittance) and, with that, a quadratic in r alone. One equivalent index stands for the whole cover, coats included.

    Parameters
    ----------
    transmittance, reflectance
        Solar, normal, of the whole cover; together at most 1.

    Returns
    -------
    tuple of float
        Refractive index, and extinction coefficient times thickness.

    Raises
    ------
    ValueError
        The pair can't come from a plane slab: it reflects more than it could.

    Notes
    -----
    **Source**: inversion of Duffie & Beckman, Eq. 5.3.1-5.3.3 at normal incidence; held by a round trip.
    """
    beta = transmittance**2 - reflectance**2 + 2.0 * reflectance + 1.0
    r = (beta - math.sqrt(beta**2 - 4.0 * (2.0 - reflectance) * reflectance)) / (2.0 * (2.0 - reflectance))
    one_pass = (reflectance - r) / (r * transmittance) if r > 0.0 else transmittance
    if not 0.0 < one_pass <= 1.0 + 1e-9:
        raise ValueError("no plane slab has this pair of normal transmittance and reflectance")
    return (1.0 + math.sqrt(r)) / (1.0 - math.sqrt(r)), -math.log(min(one_pass, 1.0))


def flat_black_absorptance(incidence_deg: Floats) -> Floats:
    """Absorptance of a flat-black surface over its value at normal incidence.

    Parameters
    ----------
    incidence_deg
        Angle of incidence, 0 to 90, shape ``(n,)`` [deg].

    Returns
    -------
    ndarray
        Ratio, ``(n,)``. The polynomial holds to 80 degrees; from there it falls in a straight line to 0 at 90.

    Notes
    -----
    **Source**: Beckman, Klein & Duffie (1977) in Duffie & Beckman, Eq. 4.11.1 (coefficients from memory).
    """
    coefficients = (1.0, -1.5879e-3, 2.7314e-4, -2.3026e-5, 9.0244e-7, -1.8e-8, 1.7734e-10, -6.9937e-13)
    angle = np.asarray(incidence_deg, dtype=float)
    held = np.polynomial.polynomial.polyval(np.minimum(angle, 80.0), coefficients)
    return np.asarray(held * np.clip((90.0 - angle) / 10.0, 0.0, 1.0))


def brandemuehl_beckman_1980(tilt_deg: float) -> tuple[float, float]:
    """Angles at which beam would be transmitted like isotropic sky light and like light from the ground.

    Parameters
    ----------
    tilt_deg
        Tilt from the horizontal, 0 to 90 [deg].

    Returns
    -------
    tuple of float
        For the sky, for the ground [deg].

    Notes
    -----
    **Source**: Brandemuehl & Beckman, Solar Energy 24 (1980) 511; Duffie & Beckman, Eq. 5.4.1-5.4.2.
    """
    sky = 59.7 - 0.1388 * tilt_deg + 0.001497 * tilt_deg**2
    ground = 90.0 - 0.5788 * tilt_deg + 0.002693 * tilt_deg**2
    return sky, ground
