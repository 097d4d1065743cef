"""Days and hours of sunlight out of twelve monthly means: clearness by published distributions, kept within a clear sky."""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq

from weather.climate import Frame, Indices
from weather.year import Floats

__all__ = ["DARKEST", "bendt_curve", "bendt_quantile", "brightest_day", "daily_clearness", "hourly_irradiance"]

HOURLY_LAG = 0.54  # autocorrelation of an hour's scatter with the next one's; Graham & Hollands 1990, from memory
DARKEST = 0.05  # clearness of the darkest day; Bendt, Collares-Pereira & Rabl 1981
ROUNDS = 100  # of scaling; a few do, a bright month against the limit takes more
CLOSE = 1e-6  # of a day's or a month's sum
FAINTEST = 0.02  # of the clear sky, so that every lit hour can be scaled; our choice


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


def daily_clearness(frame: Frame, *, ghi_kWh_m2: Floats, ranks: Floats) -> Floats:  # noqa: N803 # the unit's symbol
    """Clearness of every day: the month's curve at the day's place in its month.

    Parameters
    ----------
    frame
        The year's hours.
    ghi_kWh_m2
        Monthly means of a day, ``(12,)`` [kWh/m2].
    ranks
        Fraction of the days of its month that are less clear than this one, ``(365,)``.

    Returns
    -------
    ndarray
        ``(365,)``; 0 in months without sun.
    """
    top, limit = frame.by_day(frame.top), frame.by_day(frame.limit)
    clearness = np.zeros(365)
    for number in range(12):
        days = frame.month_of_day == number
        above = float(top[days].sum())
        if ghi_kWh_m2[number] <= 0.0 or above <= 0.0:
            continue
        mean = 1e3 * float(ghi_kWh_m2[number]) * np.count_nonzero(days) / above
        highest = max(min(brightest_day(mean), float(limit[days].sum()) / above), mean)
        clearness[days] = bendt_quantile(ranks[days], mean=mean, highest=highest)
    return clearness


def hourly_clearness(clearness: Floats, *, cosine: Floats, noise: Floats) -> Floats:
    """Clearness of every hour, before it is brought to its day's.

    Parameters
    ----------
    clearness
        Of the days, ``(d,)``.
    cosine
        Of the sun's zenith angle in their hours, ``(d, 24)``.
    noise
        Standard normal and independent, ``(d, 24)``.

    Returns
    -------
    ndarray
        May lie out of bounds, ``(d, 24)``.

    Notes
    -----
    **Source**: Graham & Hollands, Solar Energy 44 (1990) 333, from memory: the trend over air mass, the scatter and its lag-one
    autocorrelation of 0.54. The scatter is left normal and cut at the limits, where theirs is mapped to a beta distribution.
    """
    day = np.clip(clearness, 0.02, 0.92)[:, np.newaxis]
    base, swing, steep = day - 1.167 * day**3 * (1.0 - day), 0.979 * (1.0 - day), 1.141 * (1.0 - day) / day
    trend = base + swing * np.exp(-steep / np.maximum(cosine, 1e-3))
    scatter = np.empty_like(noise)
    scatter[:, 0] = noise[:, 0]
    for hour in range(1, noise.shape[1]):
        scatter[:, hour] = HOURLY_LAG * scatter[:, hour - 1] + np.sqrt(1.0 - HOURLY_LAG**2) * noise[:, hour]
    return np.asarray(trend + 0.1557 * np.sin(np.pi * day / 0.933) * scatter)


def hourly_irradiance(frame: Frame, *, ghi_kWh_m2: Floats, clearness: Floats, noise: Floats) -> Floats:  # noqa: N803 # the unit's symbol
    """Global horizontal irradiance of every hour: first each day's sum, then each month's, both within the clear sky.

    Parameters
    ----------
    frame
        The year's hours.
    ghi_kWh_m2
        Monthly means of a day, ``(12,)`` [kWh/m2].
    clearness
        Of the days, ``(365,)``.
    noise
        Standard normal and independent, ``(365, 24)``.

    Returns
    -------
    ndarray
        ``(8760,)`` [W/m2].
    """
    rough = hourly_clearness(clearness, cosine=frame.cosine.reshape(365, 24), noise=noise).ravel()
    ghi = np.clip(rough * frame.top, FAINTEST * frame.limit, frame.limit)
    ghi = _brought_to(clearness * frame.by_day(frame.top), ghi, group=frame.day, limit=frame.limit)
    days = np.bincount(frame.month_of_day, minlength=12)
    return _brought_to(1e3 * ghi_kWh_m2 * days, ghi, group=frame.month, limit=frame.limit)


def _brought_to(sums: Floats, values: Floats, *, group: Indices, limit: Floats) -> Floats:
    """Values scaled group by group to these sums, none above its limit; a sum beyond the limits' is met as far as they go."""
    size = len(sums)
    reach = np.minimum(sums, np.bincount(group, limit, size))
    for _ in range(ROUNDS):
        now = np.bincount(group, values, size)
        if np.all(np.abs(now - reach) <= CLOSE * reach):
            break
        full = np.where(values < limit, 0.0, values)
        held = np.where(reach > now, np.bincount(group, full, size), 0.0)  # what is at its limit can't go up, but down
        factor = np.divide(reach - held, now - held, out=np.zeros(size), where=now > held)
        values = np.minimum(values * factor[group], limit)
    return values
