"""Long-wave exchange between grey surfaces."""

from __future__ import annotations

import math

from scipy.constants import Stefan_Boltzmann as SIGMA

from weather.year import Floats

__all__ = ["SIGMA", "parallel_plates_factor", "radiative_flux", "sky_view_factor"]


def parallel_plates_factor(eps_1: float, eps_2: float) -> float:
    """Exchange factor of two large parallel grey plates.

    Parameters
    ----------
    eps_1, eps_2
        Hemispherical emittances of the facing surfaces, above 0 and up to 1.

    Returns
    -------
    float
        Multiplies sigma (T1^4 - T2^4) to give the flux.

    Notes
    -----
    **Source**: standard result of grey enclosure theory, e.g. Incropera et al., Fundamentals of Heat and Mass Transfer,
    Eq. 13.19. Held by ``tests/published/test_radiation.py``.
    """
    return 1.0 / (1.0 / eps_1 + 1.0 / eps_2 - 1.0)


def radiative_flux(t_from: Floats, t_to: Floats, *, factor: float | Floats) -> tuple[Floats, Floats, Floats]:
    """Net long-wave flux between two surfaces, with its slopes.

    Parameters
    ----------
    t_from, t_to
        Temperatures, shape ``(n,)`` [K].
    factor
        Exchange factor, emittance times view factor for a small surface in large surroundings; one, or ``(n,)``.

    Returns
    -------
    tuple
        Flux from the first to the second [W/m2] and its derivatives to ``t_from`` and ``t_to`` at this factor [W/m2K], each
        ``(n,)``.

    Notes
    -----
    **Source**: Stefan-Boltzmann law, constant of CODATA as carried by scipy.
    """
    strength = factor * SIGMA
    cube_from, cube_to = t_from * t_from * t_from, t_to * t_to * t_to
    flux = strength * (cube_from * t_from - cube_to * t_to)
    return flux, 4.0 * strength * cube_from, -4.0 * strength * cube_to


def sky_view_factor(tilt_deg: float) -> float:
    """Share of its hemisphere in which a tilted plane sees an unobstructed sky; the rest is ground.

    Parameters
    ----------
    tilt_deg
        Tilt from the horizontal [deg].

    Returns
    -------
    float
        (1 + cos tilt) / 2.

    Notes
    -----
    **Source**: Liu & Jordan, Solar Energy 7 (1963) 53.
    """
    return 0.5 * (1.0 + math.cos(math.radians(tilt_deg)))
