"""How sure a year's heat is: the same year with each other published relation, one at a time."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, NamedTuple

from collector.build.scenario import CHOICES, Scenario
from collector.study.year import WIND_PROFILE, HeatYear, heat_years
from weather.sky import available_models
from weather.sun import sun_position
from weather.year import WeatherYear

__all__ = ["Alternative", "alternatives"]

BUILDING_LENGTH = 8.0  # m, cube root of a house of about 500 m3, where the scenario names no building
AROUND = ("wind", "sky", "wind speed")  # what leaves the sunlight absorbed as it is
STEPS = ("wind", "sky", "tilted_sky", "diffuse")


class Alternative(NamedTuple):
    """One thing changed: which, to what, the year's heat then [kWh/m2], and whether it is a bound and no relation."""

    changed: str
    to: str
    useful: float
    bound: bool


def alternatives(scenario: Scenario, *, weather: WeatherYear, base: HeatYear) -> list[list[Alternative]]:
    """Repeat a year with each other relation for wind, sky, tilted sky and diffuse optics, and with half the wind.

    Parameters
    ----------
    scenario
        The base case.
    weather
        Its year.
    base
        As solved for the base case, at any of its temperatures.

    Returns
    -------
    list of list of Alternative
        For each temperature of the scenario, in its order.
    """
    sun = sun_position(weather)
    by_build = scenario.collector.tested is None  # of a test report, wind changes what is absorbed too
    rows = [
        [
            Alternative(changed, to, year.useful_kWh_m2, bound)
            for year in heat_years(
                other, weather=weather, sun=sun, like=base if changed in AROUND and by_build else None
            )
        ]
        for changed, to, other, bound in _others(scenario, weather)
    ]
    return [list(column) for column in zip(*rows, strict=True)]


def _others(scenario: Scenario, weather: WeatherYear) -> Iterator[tuple[str, str, Scenario, bool]]:
    for step in _steps(scenario):
        names = available_models(weather) if step == "sky" else list(CHOICES[step])
        for name in names:
            if name != getattr(scenario.models, step):
                other, note = _with_model(scenario, step=step, name=name)
                yield step, name + note, other, name == "ambient"
    mounting = scenario.mounting
    if mounting.wind_height_m is not None:
        factor = (mounting.wind_height_m / 10.0) ** WIND_PROFILE
    else:
        factor = 1.0 if mounting.wind_factor is None else mounting.wind_factor
    half = mounting.model_copy(update={"wind_height_m": None, "wind_factor": 0.5 * factor})
    report = scenario.collector.tested
    if report is None or report.a3_J_m3K or report.a6_s_m or report.a7_J_m3K4:
        yield "wind speed", "half", _with(scenario, mounting=half), False


def _steps(scenario: Scenario) -> tuple[str, ...]:
    """Steps whose relation this collector's year rests on; a test report holds wind, and often sky, in its coefficients."""
    report = scenario.collector.tested
    if report is None:
        return STEPS
    return ("sky", "tilted_sky") if report.a4 or report.a7_J_m3K4 else ("tilted_sky",)


def _with_model(scenario: Scenario, *, step: str, name: str) -> tuple[Scenario, str]:
    other = _with(scenario, models=scenario.models.model_copy(update={step: name}))
    if name != "mitchell" or scenario.mounting.building_length_m is not None:
        return other, ""
    mounting = scenario.mounting.model_copy(update={"building_length_m": BUILDING_LENGTH})
    return _with(other, mounting=mounting), f" ({BUILDING_LENGTH:g} m building)"


def _with(scenario: Scenario, **tables: Any) -> Scenario:
    return scenario.model_copy(update=tables)
