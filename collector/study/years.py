"""How years differ: the same collector in the weather of several, with their mean and what nine in ten exceed."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from scipy.constants import zero_Celsius

from collector.build.scenario import Scenario
from collector.study.year import HeatYear, heat_years, read_scenario_weather
from weather.errors import InputError, Problem
from weather.gate import remarks_of, usable
from weather.split import calendar_years
from weather.stations import STATIONS
from weather.year import WeatherYear

__all__ = ["YEAR_COLUMNS", "YearsStudy", "spread_of", "study_years"]

FEWEST = 3  # years, for a spread
NINE = 9  # years, of which the least is the P90 by rank
ENOUGH = 10  # years, below which a P90 is a guess
Z_90 = 1.2815515655446004  # of the normal distribution, exceeded by one in ten
ONE_PLACE = 25.0  # km
EARTH = 6371.0  # km
YEAR_COLUMNS = ("name", "file", "hours", "air_mean_C", "ghi_kWh_m2", "plane_kWh_m2", "useful_kWh_m2")
STANDING = (
    "P90 is the heat that nine single years in ten exceed; a mean over many years is surer than that.",
    "Long-term warming, brightening or any other trend is not modelled: years to come are taken to be like these.",
    "The spread is the weather's alone: what the model and the maker's tolerances leave open comes on top.",
)


class YearsStudy(NamedTuple):
    """The account, and whether every hour converged."""

    account: dict[str, Any]
    sound: bool


def study_years(scenario: Scenario, *, names: Sequence[str], base: Path) -> YearsStudy:
    """Solve a scenario in the weather of each year.

    Parameters
    ----------
    scenario
        Checked; its own weather is not used.
    names
        Bundled stations or weather files, each of one calendar year or of several.
    base
        Folder that paths count from.

    Returns
    -------
    YearsStudy
        One run for each temperature of the scenario.

    Raises
    ------
    InputError
        A file is wrong, a year stands twice, or there are fewer than three.
    """
    weathers = [(name, year) for given in names for name, year in _years_of(scenario, given, base=base)]
    _refuse(weathers)
    solved = [heat_years(scenario, weather=weather) for _, weather in weathers]
    runs = []
    for column in zip(*solved, strict=True):
        years = [_row(name, year) for (name, _), year in zip(weathers, column, strict=True)]
        feed = column[0].uptake.feed
        key = "inlet_C" if feed.at_inlet else "mean_C"
        spread = spread_of([year["useful_kWh_m2"] for year in years])
        runs.append({key: round(feed.temperature - zero_Celsius, 9), "spread": spread, "years": years})
    account = {"title": scenario.title, "runs": runs, "remarks": [*_remarks([year for _, year in weathers]), *STANDING]}
    return YearsStudy(account, not any(year["unconverged_hours"] for run in runs for year in run["years"]))


def _years_of(scenario: Scenario, given: str, *, base: Path) -> Iterator[tuple[str, WeatherYear]]:
    """Every calendar year behind a name, with what to call it."""
    place = scenario.place.model_copy(update={"weather": given})
    try:
        whole = read_scenario_weather(scenario.model_copy(update={"place": place}), base=base)
    except InputError as fault:
        raise InputError(
            [replace(each, where="--weather") if each.where == "place.weather" else each for each in fault.problems]
        ) from None
    stem = given if given in STATIONS else Path(given).stem
    parts = calendar_years(whole)
    for part in parts:
        name = stem if len(parts) == 1 else f"{stem} {part.source_years[0]}"
        yield name, usable(part, accept=scenario.place.accept)


def _refuse(weathers: Sequence[tuple[str, WeatherYear]]) -> None:
    """Refuse too few years, and one that stands twice: it would narrow the spread."""
    for place, (name, year) in enumerate(weathers):
        for other, before in weathers[:place]:
            if np.array_equal(year.ghi, before.ghi) and np.array_equal(year.t_air, before.t_air):
                got = f"{other} and {name}"
                do = "name each year once: twice the same would narrow the spread"
                raise InputError(Problem(where="--weather", what="the same year twice", got=got, do=do))
    if len(weathers) < FEWEST:
        allowed = f"{FEWEST} or more: files, stations, or one file of several calendar years"
        raise InputError(
            Problem(where="--weather", what="too few years for a spread", got=str(len(weathers)), allowed=allowed)
        )


def _row(name: str, year: HeatYear) -> dict[str, Any]:
    weather, plane = year.conditions.weather, year.conditions.plane
    solved = year.running if year.drift is None else year.drift
    return {
        "name": name,
        "file": weather.file,
        "source_years": list(weather.source_years),
        "hours": len(weather),
        "air_mean_C": float(weather.t_air.mean()) - zero_Celsius,
        "ghi_kWh_m2": float(weather.ghi.sum()) / 1e3,
        "plane_kWh_m2": float(plane.total.sum()) / 1e3,
        "useful_kWh_m2": year.useful_kWh_m2,
        "unconverged_hours": 0 if solved is None else int(np.count_nonzero(~solved.converged)),
        "notices": [*remarks_of(weather), *plane.notices],
    }


def spread_of(heat: Sequence[float]) -> dict[str, Any]:
    """Mean, spread, and what half and nine in ten of the years exceed.

    Parameters
    ----------
    heat
        Of each year, three or more [kWh/m2].

    Returns
    -------
    dict
        By the normal assumption and by rank; ``p90_rank_kWh_m2`` is None with fewer than nine years, which do not reach it.

    Notes
    -----
    **Source**: sample statistics; exceedance of the m-th largest of n as m / (n + 1), Weibull 1939, in Gumbel, Statistics of
    Extremes (1958), straight between ranks.
    """
    values = np.sort(np.asarray(heat, dtype=float))[::-1]
    n, mean, deviation = len(values), float(values.mean()), float(values.std(ddof=1))
    exceedance = np.arange(1, n + 1) / (n + 1.0)
    return {
        "years": n,
        "mean_kWh_m2": mean,
        "standard_deviation_kWh_m2": deviation,
        "standard_error_kWh_m2": deviation / math.sqrt(n),
        "p50_normal_kWh_m2": mean,
        "p90_normal_kWh_m2": mean - Z_90 * deviation,
        "p50_rank_kWh_m2": float(np.interp(0.5, exceedance, values)),
        "p90_rank_kWh_m2": float(np.interp(0.9, exceedance, values)) if n >= NINE else None,
        "p90_is_a_guess": n < ENOUGH,
    }


def _remarks(weathers: Sequence[WeatherYear]) -> Iterator[str]:
    n = len(weathers)
    if n < NINE:
        yield f"A P90 by rank needs {NINE} years: with fewer the least of them is exceeded by less than nine in ten."
    if n < ENOUGH:
        yield f"A P90 from {n} years is a guess: its tail is assumed and not seen. Ten years are few, thirty are usual."
    apart = max(_apart(one, other) for one in weathers for other in weathers)
    if apart > ONE_PLACE:
        yield (
            f"These years come from places up to {apart:.0f} km apart: the spread is one of places, and tells nothing of how years "
            "differ at one of them."
        )
    made = sum("synthetic" in weather.site.name.lower() for weather in weathers)
    if made:
        yield f"{made} of them are synthetic, made from monthly means: how years differ is not in them."
    typical = sum(len(weather.source_years) > 1 for weather in weathers)
    if typical:
        yield (
            f"{typical} of them {'is' if typical == 1 else 'are'} put together from months of several calendar years, as typical "
            "years are: bad and good years are left out of such, and the spread of real years is wider."
        )


def _apart(one: WeatherYear, other: WeatherYear) -> float:
    """Great-circle distance of two sites [km]."""
    north, south = math.radians(one.site.latitude_deg), math.radians(other.site.latitude_deg)
    turn = math.radians(one.site.longitude_deg - other.site.longitude_deg)
    half = math.sin(0.5 * (north - south)) ** 2 + math.cos(north) * math.cos(south) * math.sin(0.5 * turn) ** 2
    return 2.0 * EARTH * math.asin(min(math.sqrt(half), 1.0))
