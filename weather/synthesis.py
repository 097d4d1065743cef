"""An hourly year from twelve monthly means: made by chance, repeatable by its seed, true to the means."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from pvlib.atmosphere import alt2pres

from weather.air import (
    cloud_cover,
    day_course,
    dew_point,
    hourly_temperature,
    hourly_wind,
    usual_range,
    usual_spread,
)
from weather.clearness import daily_clearness, hourly_irradiance
from weather.climate import STATED_SKY, YEAR, Climate, Frame, climate_problems, frame_of, under_clear_sky
from weather.errors import InputError
from weather.year import Floats, Stamp, WeatherYear

__all__ = ["METHODS", "assumed_words", "synthesise"]

METHODS = {
    "daily clearness": "exponential distribution, Bendt, Collares-Pereira & Rabl 1981; brightest day, Hollands & Huget 1983; "
    "one day from each equal part of it, Knight, Klein & Duffie 1991",
    "day to day": "first-order autoregressive with maximum and minimum temperature, Richardson 1981",
    "hourly clearness": "trend and scatter with lag one, Graham & Hollands 1990 (from memory)",
    "diffuse share": "Erbs, Klein & Duffie 1982, through pvlib; beam by closure",
    "hourly temperature": "half cosines, de Wit et al. 1978",
    "wind": "Weibull of shape 2, lag-one autocorrelation 0.85",
    "cloud": "from clearness, Kasten & Czeplak 1980",
}
LOWEST_SUN = 0.065  # cosine of the zenith angle below which all light is diffuse; 3.7 deg, as pvlib's limit


def synthesise(climate: Climate, *, seed: int, clear_sky: bool = False, where: str = "climate") -> WeatherYear:
    """Hourly year with a climate's monthly means.

    A year's days are one from each equal part of the month's distribution, in an order of chance: seeds differ in order and in
    hours, and hardly in totals. How real years differ from each other is therefore not in it.

    Parameters
    ----------
    climate
        Twelve monthly means.
    seed
        The same seed gives the same year.
    clear_sky
        No cloud all year, as an upper bound: the climate's GHI is then not met, nor asked for.
    where
        File of the climate, for messages.

    Returns
    -------
    WeatherYear
        8760 h.

    Raises
    ------
    InputError
        Means that no year can have.
    """
    frame = frame_of(climate.site)
    if faults := climate_problems(climate, frame=frame, where=lambda key: where):
        raise InputError(faults)
    rng = np.random.default_rng(seed)
    course, noise = day_course(rng), rng.standard_normal((365, 24))
    ranks = _ranks(course[:, 2], frame=frame, rng=rng)
    bare, direct = under_clear_sky(frame.sun, cosine=frame.cosine, site=climate.site, sky=STATED_SKY)
    if clear_sky:
        ghi, dni = bare, direct
    else:
        asked = climate.ghi_kWh_m2
        days = daily_clearness(frame, ghi_kWh_m2=asked, ranks=ranks)
        ghi = hourly_irradiance(frame, ghi_kWh_m2=asked, clearness=days, noise=noise)
        dni = _beam(frame, ghi)
    t_air = hourly_temperature(frame, climate=_filled(climate, frame=frame), course=course)
    words = "synthetic clear sky" if clear_sky else "synthetic"
    return _year(
        replace(frame, site=replace(climate.site, name=f"{climate.site.name} ({words})")),
        where=f"{words}, from {where}, seed {seed}",
        said=assumed_words(climate),
        ghi=ghi,
        dni=dni,
        t_air=t_air,
        wind=hourly_wind(frame, means=climate.wind, noise=rng.standard_normal(8760)),
        humidity=climate.humidity,
        cloud=np.zeros(8760) if clear_sky else cloud_cover(frame, ghi=ghi, clear=bare),
    )


def assumed_words(climate: Climate) -> tuple[str, ...]:
    """What stands in for means that a climate does not give.

    Parameters
    ----------
    climate
        Twelve monthly means.

    Returns
    -------
    tuple of str
        A sentence each.
    """
    words = {
        "t_range": "no daily range of temperature given: 25.8 K x clearness - 5.21 K; Erbs, Klein & Beckman 1983",
        "t_spread": "no day-to-day deviation of temperature given: from the twelve means; Erbs, Klein & Beckman 1983",
        "humidity": "no humidity given: dew point at the day's minimum; Running, Nemani & Hungerford 1987",
        "wind": "no wind given: mean 3 m/s; common practice, no source",
    }
    return tuple(sentence for name, sentence in words.items() if getattr(climate, name) is None)


def _ranks(course: Floats, *, frame: Frame, rng: np.random.Generator) -> Floats:
    """Place of each day among its month's by sunshine, at random within its equal part of the distribution.

    Notes
    -----
    **Source**: Knight, Klein & Duffie, Solar Energy 46 (1991) 109.
    """
    jitter, ranks = rng.random(365), np.empty(365)
    for number in range(12):
        days = frame.month_of_day == number
        order = np.argsort(np.argsort(course[days]))
        ranks[days] = (order + jitter[days]) / np.count_nonzero(days)
    return ranks


def _beam(frame: Frame, ghi: Floats) -> Floats:
    """Direct normal irradiance by the diffuse share of each hour's clearness, at most that of the clean sky.

    Notes
    -----
    **Source**: Erbs, Klein & Duffie, Solar Energy 28 (1982) 293, through pvlib.
    """
    from pvlib.irradiance import erbs

    zenith = np.degrees(np.arccos(np.clip(frame.cosine, 0.0, 1.0)))
    diffuse = np.asarray(erbs(ghi, zenith, frame.day + 1)["dhi"])
    high = frame.cosine > LOWEST_SUN
    normal = np.maximum(ghi - diffuse, 0.0) / np.where(high, frame.cosine, 1.0)
    return np.where(high, np.minimum(normal, frame.limit_normal), 0.0)


def _filled(climate: Climate, *, frame: Frame) -> Climate:
    """Climate with the usual range and spread of temperature where it gives none."""
    top = frame.by_month(frame.top) * 24.0 / 1e3
    clearness = np.divide(climate.ghi_kWh_m2, top, out=np.zeros(12), where=top > 0.0)
    return replace(
        climate,
        t_range=usual_range(clearness) if climate.t_range is None else climate.t_range,
        t_spread=usual_spread(climate.t_air) if climate.t_spread is None else climate.t_spread,
    )


def _year(
    frame: Frame,
    *,
    where: str,
    said: tuple[str, ...],
    ghi: Floats,
    dni: Floats,
    t_air: Floats,
    wind: Floats,
    humidity: Floats | None,
    cloud: Floats,
) -> WeatherYear:
    """Columns put together: diffuse light by closure, dew point by humidity."""
    return WeatherYear(
        site=frame.site,
        file=where,
        format="synthetic",
        stamp=Stamp(rule_min=30.0, found_min=None, used_min=30.0, rmse_w_m2=None, rmse_unshifted_w_m2=None),
        time_mid=frame.time_mid,
        month=frame.month + 1,
        ghi=ghi,
        dni=dni,
        dhi=np.maximum(ghi - dni * frame.cosine, 0.0),
        t_air=t_air,
        wind=wind,
        t_dew=dew_point(frame, t_air=t_air, humidity=humidity),
        cloud=cloud,
        longwave=None,
        albedo=None,
        pressure=float(alt2pres(frame.site.altitude_m)),
        source_years=(YEAR,),
        notices=said,
    )
