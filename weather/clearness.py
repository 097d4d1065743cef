"""Days and hours of sunlight out of twelve monthly means: clearness by published distributions, kept within a clear sky."""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq

from weather.climate import Frame
from weather.year import Floats

__all__ = ["DARKEST", "bendt_curve", "bendt_quantile", "brightest_day", "daily_clearness"]

DARKEST = 0.05  # clearness of the darkest day; Bendt, Collares-Pereira & Rabl 1981
ROUNDS = 200  # of scaling; some ten do, a bright month against the limit takes more
CLOSE = 1e-4  # of a month's mean


def brightest_day(mean: float) -> float:
    """Clearness of a month's brightest day.

    Parameters
    ----------
    mean
        The month's.

    Returns
    -------
    float
        Greater than the mean up to means of 0.82.

    Notes
    -----
    **Source**: Hollands & Huget, Solar Energy 30 (1983) 195; Duffie & Beckman, Eq. 2.9.5 (number from memory).
    """
    return 0.6313 + 0.267 * mean - 11.9 * (mean - 0.75) ** 8


def bendt_curve(clearness: Floats, *, mean: float, highest: float) -> Floats:
    """Fraction of a month's days that are less clear.

    Parameters
    ----------
    clearness
        Of days, ``(n,)``.
    mean
        Of the month.
    highest
        Of its brightest day.

    Returns
    -------
    ndarray
        ``(n,)``.

    Notes
    -----
    **Source**: Bendt, Collares-Pereira & Rabl, Solar Energy 27 (1981) 1; Duffie & Beckman, Eq. 2.9.6 (number from memory). The
    exponent is solved from the mean and not taken from a fit.
    """
    rate = _rate(mean, lowest=_lowest(mean), highest=highest)
    above = np.clip(clearness, _lowest(mean), highest) - _lowest(mean)
    return np.asarray(np.expm1(rate * above) / np.expm1(rate * (highest - _lowest(mean))))


def bendt_quantile(fraction: Floats, *, mean: float, highest: float) -> Floats:
    """Clearness below which a fraction of a month's days stays; the curve of ``bendt_curve`` the other way.

    Parameters
    ----------
    fraction
        ``(n,)``.
    mean, highest
        As there.

    Returns
    -------
    ndarray
        ``(n,)``.
    """
    lowest = _lowest(mean)
    rate = _rate(mean, lowest=lowest, highest=highest)
    return np.asarray(lowest + np.log1p(fraction * np.expm1(rate * (highest - lowest))) / rate)


def _lowest(mean: float) -> float:
    return min(DARKEST, 0.5 * mean)


def _rate(mean: float, *, lowest: float, highest: float) -> float:
    """Exponent whose curve has this mean."""
    width, place = highest - lowest, (mean - lowest) / (highest - lowest)
    steep = 700.0
    place = float(np.clip(place, 1.01 / steep, 1.0 - 1.01 / steep))

    def off(x: float) -> float:  # mean of the truncated exponential on 0 to 1, less the place asked for
        return (0.5 + x / 12.0 if abs(x) < 1e-4 else 1.0 / -np.expm1(-x) - 1.0 / x) - place

    found = float(brentq(off, -steep, steep))
    return (found if abs(found) > 1e-6 else 1e-6) / width


def daily_clearness(frame: Frame, *, means: Floats, ghi_kWh_m2: Floats, chance: Floats, rng: np.random.Generator) -> Floats:  # noqa: N803 # the unit's symbol
    raise NotImplementedError
