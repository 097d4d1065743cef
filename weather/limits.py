"""Limits of irradiance that is physically possible, or extremely rare, and of the components against each other."""

from __future__ import annotations

import numpy as np
from scipy.constants import Stefan_Boltzmann

from weather.year import Floats, Mask

__all__ = ["POSSIBLE", "RARE", "beyond", "beyond_longwave", "disagreeing"]

# lowest [W/m2]; factor on the extraterrestrial; power of cos z; constant [W/m2]
Limit = tuple[float, float, float, float]
POSSIBLE: dict[str, Limit] = {
    "ghi": (-4.0, 1.5, 1.2, 100.0),
    "dhi": (-4.0, 0.95, 1.2, 50.0),
    "dni": (-4.0, 1.0, 0.0, 0.0),
}
RARE: dict[str, Limit] = {"ghi": (-2.0, 1.2, 1.2, 50.0), "dhi": (-2.0, 0.75, 1.2, 30.0), "dni": (-2.0, 0.95, 0.2, 10.0)}
LONGWAVE = {"possible": (40.0, 700.0), "rare": (60.0, 500.0)}  # W/m2
DIM = 50.0  # W/m2 of DHI + DNI cos z, below which the components are not compared
LOW_SUN, SET_SUN = 75.0, 93.0  # deg of zenith angle: within 8 % up to the first, within 15 % up to the second


def beyond(values: Floats, *, limit: Limit, cosine: Floats, dni_extra: Floats) -> Mask:
    """Where irradiance lies above what the sun's height allows.

    Parameters
    ----------
    values
        ``(n,)`` [W/m2]; NaN is not beyond.
    limit
        Of ``POSSIBLE`` or ``RARE``; its lower side is not looked at here.
    cosine
        Of the zenith angle, 0 below the horizon, ``(n,)``.
    dni_extra
        Normal irradiance outside the atmosphere, ``(n,)`` [W/m2].

    Returns
    -------
    ndarray
        ``(n,)``.

    Notes
    -----
    **Source**: Long & Shi, Open Atmos. Sci. J. 2 (2008) 23 (formulae from memory).
    """
    _, factor, power, constant = limit
    return np.asarray(values > factor * dni_extra * cosine**power + constant)


def beyond_longwave(longwave: Floats, *, t_air: Floats) -> Mask:
    """Where the sky's long wave is out of its limits or does not fit the air's temperature.

    Parameters
    ----------
    longwave
        ``(n,)`` [W/m2].
    t_air
        ``(n,)`` [K].

    Returns
    -------
    ndarray
        ``(n,)``.

    Notes
    -----
    **Source**: Long & Shi 2008 (from memory): 40 to 700 W/m2, and from 0.4 sigma T^4 to sigma T^4 + 25 W/m2.
    """
    low, high = LONGWAVE["possible"]
    black = Stefan_Boltzmann * t_air**4
    outside = (longwave < low) | (longwave > high)
    return np.asarray(outside | (longwave < 0.4 * black) | (longwave > black + 25.0))


def disagreeing(*, ghi: Floats, dni: Floats, dhi: Floats, zenith_deg: Floats) -> tuple[Mask, Mask]:
    """Where GHI and DHI + DNI cos z disagree, and where they can be compared.

    Parameters
    ----------
    ghi, dni, dhi
        ``(n,)`` [W/m2].
    zenith_deg
        ``(n,)`` [deg].

    Returns
    -------
    ndarray
        Beyond 8 % with the sun above 15 degrees, beyond 15 % below that.
    ndarray
        Where the sum exceeds 50 W/m2 and the zenith angle is below 93 degrees.

    Notes
    -----
    **Source**: Long & Shi 2008 (from memory).
    """
    total = dhi + dni * np.maximum(np.cos(np.radians(zenith_deg)), 0.0)
    told = (total > DIM) & (zenith_deg < SET_SUN) & np.isfinite(ghi)
    off = np.abs(ghi / np.where(told, total, 1.0) - 1.0)
    return np.asarray(told & (off > np.where(zenith_deg < LOW_SUN, 0.08, 0.15))), np.asarray(told)
