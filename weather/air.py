"""Air, wind and cloud of a synthetic year: temperature by day and hour, dew point, wind speed, cloud cover."""

from __future__ import annotations

import numpy as np
from scipy.special import ndtr

from weather.climate import Climate, Frame
from weather.sky import magnus_vapour_pressure
from weather.year import Floats

__all__ = ["cloud_cover", "day_course", "dew_point", "hourly_temperature", "hourly_wind", "usual_range", "usual_spread"]

CARRIED = np.array([[0.567, 0.086, -0.002], [0.253, 0.504, -0.050], [-0.006, -0.039, 0.244]])
FRESH = np.array([[0.781, 0.0, 0.0], [0.328, 0.637, 0.0], [0.238, -0.341, 0.873]])
TOGETHER = 0.633  # correlation of the day's maximum and minimum that follows from these two
RUN_IN = 60  # d
WIDEST = 3.0  # standard deviations of a day from its month
NARROW, UNEVEN = 0.1, 0.4  # of the month's mean range: the least range of a day, the most that ranges scatter; our rule
ROUNDS = 5  # of bringing the daily range to the month's
COLDEST, HOTTEST = 185.0, 332.0  # K, what no hour goes beyond
LATE = 2.0  # h from solar noon to the day's maximum; de Wit et al. 1978
EARLIEST, LATEST = 3.0, 9.0  # h before solar noon, between which the minimum stands where the sun hardly rises or sets
WIND = 3.0  # m/s where the climate gives none; common practice, no source
WIND_LAG = 0.85  # autocorrelation of the wind from hour to hour; common practice, no source
GUST = 4.0  # standard deviations beyond which no hour's wind goes


def day_course(rng: np.random.Generator) -> Floats:
    """Departures of maximum temperature, minimum temperature and sunshine from their month, day by day.

    Parameters
    ----------
    rng
        Source of chance.

    Returns
    -------
    ndarray
        Standard normal, ``(365, 3)``.

    Notes
    -----
    **Source**: Richardson, Water Resources Research 17 (1981) 182; the matrices as Richardson & Wright, USDA ARS-8 (1984) give
    them for the United States, from memory. Lag-one autocorrelations that follow: maximum 0.62, minimum 0.67, sunshine 0.25.
    Sunny days have warmer afternoons (correlation 0.19) and colder nights (-0.19).
    """
    state, course = np.zeros(3), np.empty((RUN_IN + 365, 3))
    for day, chance in enumerate(rng.standard_normal((RUN_IN + 365, 3))):
        state = course[day] = CARRIED @ state + FRESH @ chance
    return course[RUN_IN:]


def usual_range(clearness: Floats) -> Floats:
    """Mean daily range of the air temperature where none is given.

    Parameters
    ----------
    clearness
        Monthly means, ``(12,)``.

    Returns
    -------
    ndarray
        At least 2, ``(12,)`` [K].

    Notes
    -----
    **Source**: Erbs, Klein & Beckman, ASHRAE Journal 25(6) (1983) 60: 25.8 K - 5.21 (from memory).
    """
    return np.asarray(np.maximum(25.8 * clearness - 5.21, 2.0))


def usual_spread(t_air: Floats) -> Floats:
    """Standard deviation of the daily mean temperature where none is given.

    Parameters
    ----------
    t_air
        Monthly means, ``(12,)`` [K].

    Returns
    -------
    ndarray
        At least 0.5, ``(12,)`` [K].

    Notes
    -----
    **Source**: Erbs, Klein & Beckman 1983 (from memory): the monthly mean's own deviation 1.45 - 0.029 t + 0.0664 of the twelve
    means', and a logistic distribution of the days, exp(3.396 h), whose deviation is 0.534 times that times the root of their
    number.
    """
    monthly = 1.45 - 0.029 * (t_air - 273.15) + 0.0664 * np.std(t_air, ddof=1)
    return np.asarray(np.maximum(0.534 * monthly * np.sqrt(365.0 / 12.0), 0.5))


def hourly_temperature(frame: Frame, *, climate: Climate, course: Floats) -> Floats:
    """Air temperature of every hour.

    Parameters
    ----------
    frame
        The year's hours.
    climate
        Monthly means, with range and spread given.
    course
        Of ``day_course``.

    Returns
    -------
    ndarray
        ``(8760,)`` [K].

    Notes
    -----
    **Source**: de Wit, Goudriaan & van Laar 1978, as in Reicosky et al., Agric. For. Meteorol. 46 (1989) 193: half cosines from
    the minimum at sunrise to the maximum two hours after noon and on to the next sunrise. The months' means run into each other
    in straight lines that keep each month's mean.
    """
    assert climate.t_range is not None  # noqa: S101 # the caller has filled these in
    assert climate.t_spread is not None  # noqa: S101
    month = frame.month_of_day
    middle = np.clip((course[:, 0] + course[:, 1]) / np.sqrt(2.0 + 2.0 * TOGETHER), -WIDEST, WIDEST)
    apart = np.clip((course[:, 0] - course[:, 1]) / np.sqrt(2.0 - 2.0 * TOGETHER), -WIDEST, WIDEST)
    scatter = climate.t_spread * 2.0 * np.sqrt((1.0 - TOGETHER) / (1.0 + TOGETHER))
    width = climate.t_range[month] + np.minimum(scatter, UNEVEN * climate.t_range)[month] * apart
    width = np.maximum(width, NARROW * climate.t_range[month])
    for _ in range(ROUNDS):  # a front within a day widens it, so that the hours' range is brought to the month's
        departure = _half_cosines(frame, middle=climate.t_spread[month] * middle, width=width)
        ranges = np.repeat(np.ptp(departure.reshape(365, 24), axis=1), 24)
        width = width * (climate.t_range / frame.by_month(ranges))[month]
    shares = _shares(frame)
    means = np.array([frame.by_month(share) for share in shares.T]).T
    seasons = np.linalg.solve(means, climate.t_air - frame.by_month(departure))
    return np.clip(shares @ seasons + departure, COLDEST, HOTTEST)


def _half_cosines(frame: Frame, *, middle: Floats, width: Floats) -> Floats:
    """Course through the days' minima and maxima."""
    ahead = frame.site.utc_offset_h - frame.site.longitude_deg / 15.0
    noon = (ahead + 12.0) % 24.0  # by the clock; near the date line clock and longitude may be a day apart
    latitude = np.radians(frame.site.latitude_deg)
    declination = np.radians(frame.sun.declination_deg[12::24])
    sunset = np.degrees(np.arccos(np.clip(-np.tan(latitude) * np.tan(declination), -1.0, 1.0))) / 15.0
    start = 24.0 * np.arange(365) + noon
    times = np.stack([start - np.clip(sunset, EARLIEST, LATEST), start + LATE], axis=1).ravel()
    values = np.stack([middle - 0.5 * width, middle + 0.5 * width], axis=1).ravel()
    times = np.concatenate([times[-2:] - 8760.0, times, times[:2] + 8760.0])
    values = np.concatenate([values[-2:], values, values[:2]])
    hours = np.arange(8760) + 0.5
    after = np.searchsorted(times, hours)
    before = after - 1
    phase = (hours - times[before]) / (times[after] - times[before])
    return np.asarray(values[before] + (values[after] - values[before]) * 0.5 * (1.0 - np.cos(np.pi * phase)))


def _shares(frame: Frame) -> Floats:
    """Weight of each month's value in each hour: straight lines between the middles of the months, ``(8760, 12)``."""
    hours = 0.5 + np.arange(8760, dtype=np.float64)
    middles = frame.by_month(hours)
    around = np.concatenate([[middles[-1] - 8760.0], middles, [middles[0] + 8760.0]])
    corners = np.concatenate([np.eye(12)[-1:], np.eye(12), np.eye(12)[:1]])
    return np.stack([np.interp(hours, around, corners[:, number]) for number in range(12)], axis=1)


def dew_point(frame: Frame, *, t_air: Floats, humidity: Floats | None) -> Floats:
    """Dew point of every hour.

    Parameters
    ----------
    frame
        The year's hours.
    t_air
        ``(8760,)`` [K].
    humidity
        Monthly means of the relative humidity, ``(12,)``; None where not known.

    Returns
    -------
    ndarray
        At most the air's temperature, ``(8760,)`` [K].

    Notes
    -----
    **Source**: vapour pressure the same all day (common practice, no source), so that it keeps the month's humidity; Magnus form
    as in ``weather.sky``. Without humidity: dew point at the day's minimum, Running, Nemani & Hungerford, Can. J. For. Res. 17
    (1987) 472.
    """
    middles, hours = 24.0 * np.arange(365) + 12.0, np.arange(8760) + 0.5
    if humidity is None:
        lowest = t_air.reshape(365, 24).min(axis=1)
        return np.asarray(np.minimum(np.interp(hours, middles, lowest, period=8760.0), t_air))
    full = magnus_vapour_pressure(t_air)
    daily = np.interp(hours, middles, frame.by_day(full) / 24.0, period=8760.0)
    factor = humidity.copy()
    for _ in range(30):
        vapour = np.minimum(factor[frame.month] * daily, full)
        factor = factor * humidity / frame.by_month(vapour / full)
    return np.minimum(_dew_point_of(vapour), t_air)


def _dew_point_of(vapour: Floats) -> Floats:
    """Magnus form solved for the temperature [K]."""
    share = np.log(vapour / 611.2)
    return np.asarray(243.12 * share / (17.62 - share) + 273.15)


def hourly_wind(frame: Frame, *, means: Floats | None, noise: Floats) -> Floats:
    """Wind speed of every hour.

    Parameters
    ----------
    frame
        The year's hours.
    means
        Monthly means, ``(12,)`` [m/s]; None where not known.
    noise
        Standard normal and independent, ``(8760,)``.

    Returns
    -------
    ndarray
        ``(8760,)`` [m/s].

    Notes
    -----
    **Source**: Weibull distribution of shape 2 (common practice), by a first-order autoregressive series.
    """
    asked = np.full(12, WIND) if means is None else means
    series = np.empty(8760)
    state = float(noise[0])
    for hour, chance in enumerate(noise):
        state = series[hour] = WIND_LAG * state + np.sqrt(1.0 - WIND_LAG**2) * chance
    calm = np.sqrt(-np.log(np.maximum(1.0 - ndtr(np.clip(series, -GUST, GUST)), 1e-12)))
    return np.asarray((asked / frame.by_month(calm))[frame.month] * calm)


def cloud_cover(frame: Frame, *, ghi: Floats, clear: Floats) -> Floats:
    """Cloud cover of every hour; by night in a straight line from evening to morning.

    Parameters
    ----------
    frame
        The year's hours.
    ghi
        ``(8760,)`` [W/m2].
    clear
        The same without cloud [W/m2].

    Returns
    -------
    ndarray
        Fraction, ``(8760,)``.

    Notes
    -----
    **Source**: Kasten & Czeplak, Solar Energy 24 (1980) 177: GHI falls by 0.75 N^3.4 under a cover N, solved for N.
    """
    high = (frame.cosine > 0.17) & (clear > 0.0)  # 10 deg
    through = np.divide(ghi, clear, out=np.ones_like(ghi), where=high)
    cover = np.clip((1.0 - np.clip(through, 0.25, 1.0)) / 0.75, 0.0, 1.0) ** (1.0 / 3.4)
    hours = np.arange(8760) + 0.5
    return np.asarray(np.interp(hours, hours[high], cover[high], period=8760.0))
