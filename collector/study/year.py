"""The year of heat: scenario, weather year, sunlight on the plane, absorbed power, heat balance of every hour."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from scipy.constants import zero_Celsius

from collector.balance.losses import Surroundings
from collector.balance.model import Model, model_of
from collector.balance.operated import Operated, operated_steadily
from collector.balance.optics import Absorbed
from collector.balance.steady import Feed, SteadyState, Uptake, operate, solve_stagnation
from collector.balance.transient import solve_drift
from collector.build.collector import Absorber, Collector, ReportedCollector, collector_of
from collector.build.scenario import Scenario
from collector.physics.convection import WIND_RELATIONS
from collector.study.obstructed import obstacles_of
from weather.errors import InputError, Problem
from weather.gate import usable
from weather.obstacles import Obstacles, behind
from weather.plane import PlaneIrradiance, on_plane
from weather.sky import sky_temperature
from weather.stations import open_weather
from weather.sun import Sun, sun_position
from weather.year import Floats, Mask, WeatherYear

__all__ = [
    "Conditions",
    "HeatYear",
    "conditions_of",
    "heat_years",
    "open_scenario_weather",
    "read_scenario_weather",
    "recoated",
    "standing",
    "wind_at_collector",
    "wind_coefficient",
]

WIND_PROFILE = 1.0 / 7.0  # exponent of the wind's rise with height over open country; common practice, no source


@dataclass(frozen=True, kw_only=True)
class Conditions:
    """What is the same at every fluid temperature.

    Parameters
    ----------
    weather, plane, around, absorbed
        What the hours bring.
    model
        What is solved.
    free
        Sunlight on the plane as it were without obstacles; None where there are none.
    """

    weather: WeatherYear
    plane: PlaneIrradiance
    around: Surroundings
    absorbed: Absorbed
    model: Model
    free: PlaneIrradiance | None = None


@dataclass(frozen=True, kw_only=True)
class HeatYear:
    """One collector, one year, one temperature: every hour solved.

    Parameters
    ----------
    conditions
        What the year was solved for.
    uptake
        Tubes, stream and the fluid temperature held.
    running, on
        The hours that run, and which of the year's n they are; of a collector without heat held.
    drift
        All hours, with heat held.
    """

    conditions: Conditions
    uptake: Uptake
    running: SteadyState | None
    on: Mask | None
    drift: Operated | None

    @property
    def useful_kWh_m2(self) -> float:  # noqa: N802 # the unit's symbol
        """The year's heat per area of length x width."""
        solved = self.running if self.drift is None else self.drift
        return float(solved.useful.sum() / 1e3) if solved is not None else 0.0

    def operated(self, still: SteadyState) -> Operated:
        """Return every hour as the pump had it; standing hours without heat held are those of stagnation."""
        if self.running is None or self.on is None or self.drift is not None:
            assert self.drift is not None  # noqa: S101 # a year is solved one way or the other
            return self.drift
        return operated_steadily(still, self.running, self.on)


def heat_years(
    scenario: Scenario, *, weather: WeatherYear, sun: Sun | None = None, held: bool = True, like: HeatYear | None = None
) -> list[HeatYear]:
    """Solve a scenario's year, once for each temperature it asks for.

    Parameters
    ----------
    scenario
        Checked.
    weather
        The year it gets, n hours.
    sun
        At mid-hour, if it is known already.
    held
        Whether the heat that the collector holds counts, where it is known.
    like
        A year of the same collector in the same sun, if only what surrounds it is different.

    Returns
    -------
    list of HeatYear
        In the scenario's order of temperatures.
    """
    if like is None:
        conditions = conditions_of(scenario, weather=weather, sun=sun)
    else:
        around = _surroundings(scenario, weather=weather, sun=sun or sun_position(weather))
        conditions = replace(like.conditions, around=around)
    if not held:
        conditions = replace(conditions, model=replace(conditions.model, capacity=None))
    return [_at(conditions, uptake) for uptake in _uptakes(scenario, conditions.model)]


def conditions_of(scenario: Scenario, *, weather: WeatherYear, sun: Sun | None = None) -> Conditions:
    """Collector, sunlight and surroundings of a scenario's year, before anything is solved.

    Parameters
    ----------
    scenario
        Checked.
    weather
        The year it gets, n hours; without a column that the scenario needs it is refused.
    sun
        At mid-hour, if it is known already.

    Returns
    -------
    Conditions
        The same at every fluid temperature.
    """
    sun = sun or sun_position(weather)
    obstacles = obstacles_of(scenario)
    model = model_of(_collector(scenario, obstacles), pressure=weather.pressure)
    free = _plane(scenario, weather=weather, sun=sun)
    plane = free if obstacles is None else behind(obstacles, free, weather=weather, sun=sun)
    around = _surroundings(scenario, weather=weather, sun=sun)
    absorbed = model.absorbed(plane, around)
    return Conditions(
        weather=weather,
        plane=plane,
        around=around,
        absorbed=absorbed,
        model=model,
        free=None if obstacles is None else free,
    )


def _collector(scenario: Scenario, obstacles: Obstacles | None) -> Collector | ReportedCollector:
    """The collector where it stands: obstacles are as warm as the air, and so is the ground, whose share they join."""
    built = collector_of(scenario)
    return built if obstacles is None else replace(built, sky_open=obstacles.sky_open)


def _at(conditions: Conditions, uptake: Uptake) -> HeatYear:
    network, around, absorbed = conditions.model.network, conditions.around, conditions.absorbed
    if conditions.model.capacity is not None:
        drift = solve_drift(network, around, absorbed, capacity=conditions.model.capacity, uptake=uptake)
        return HeatYear(conditions=conditions, uptake=uptake, running=None, on=None, drift=drift)
    running, on = operate(network, around, absorbed, uptake=uptake)
    return HeatYear(conditions=conditions, uptake=uptake, running=running, on=on, drift=None)


def recoated(year: HeatYear, *, absorber: Absorber) -> HeatYear:
    """Solve a year again with another coating, or any other plate, on the same collector in the same sun.

    Parameters
    ----------
    year
        Of a collector known by its build.
    absorber
        The plate to put in.

    Returns
    -------
    HeatYear
        With heat held where the first one has it.
    """
    before, uptake = year.conditions, year.uptake
    assert isinstance(before.model.collector, Collector)  # noqa: S101 # the callers refuse a test report
    built = replace(before.model.collector, absorber=absorber)
    model = model_of(built, pressure=before.weather.pressure)
    if before.model.capacity is None:
        model = replace(model, capacity=None)
    conditions = replace(before, model=model, absorbed=model.absorbed(before.plane, before.around))
    again = model.uptake(uptake.feed, start_above=uptake.start_above, stop_above=uptake.stop_above)
    return _at(conditions, again)


def standing(conditions: Conditions) -> SteadyState:
    """Every hour with the pump stopped, without heat held.

    Parameters
    ----------
    conditions
        Of a year.

    Returns
    -------
    SteadyState
        All n hours.
    """
    return solve_stagnation(conditions.model.network, conditions.around, conditions.absorbed)


def _uptakes(scenario: Scenario, model: Model) -> Iterator[Uptake]:
    operation = scenario.operation
    for feed in _feeds(scenario):
        yield model.uptake(feed, start_above=operation.start_K or 0.0, stop_above=operation.stop_K or 0.0)


def _feeds(scenario: Scenario) -> Iterator[Feed]:
    operation = scenario.operation
    if operation.inlet_C is not None:
        yield Feed(operation.inlet_C + zero_Celsius, at_inlet=True)
    yield from (Feed(mean + zero_Celsius, at_inlet=False) for mean in operation.mean_C or ())


def open_scenario_weather(scenario: Scenario, *, base: Path) -> WeatherYear:
    """Weather year that a scenario names, fit for a year's heat.

    Parameters
    ----------
    scenario
        Checked.
    base
        Folder of the scenario file.

    Returns
    -------
    WeatherYear
        Checked; one year, without a grave finding that the scenario does not accept.
    """
    return usable(read_scenario_weather(scenario, base=base), accept=scenario.place.accept)


def read_scenario_weather(scenario: Scenario, *, base: Path) -> WeatherYear:
    """Weather that a scenario names, whatever the checks say of it.

    Parameters
    ----------
    scenario
        Checked.
    base
        Folder of the scenario file.

    Returns
    -------
    WeatherYear
        Checked.
    """
    place = scenario.place
    given = {
        "latitude_deg": place.latitude,
        "longitude_deg": place.longitude,
        "altitude_m": place.altitude_m,
        "utc_offset_h": place.utc_offset_h,
    }
    own = {key: value for key, value in given.items() if value is not None}
    return open_weather(
        place.weather,
        base=base,
        place=own,
        columns=place.columns.mapping() if place.columns else None,
        decomposition=scenario.models.decomposition,
        year=place.year,
    )


def wind_at_collector(scenario: Scenario, wind: Floats) -> tuple[Floats, str]:
    """Wind at the collector, and in words how it comes from the file's.

    Parameters
    ----------
    scenario
        Its mounting.
    wind
        The file's, ``(n,)`` [m/s].

    Returns
    -------
    ndarray
        ``(n,)`` [m/s].
    str
        For the result.
    """
    mounting = scenario.mounting
    if mounting.wind_height_m is not None:
        factor = (mounting.wind_height_m / 10.0) ** WIND_PROFILE
        return factor * wind, f"the file's wind from 10 m to {mounting.wind_height_m:g} m, x {factor:.3f}"
    factor = 1.0 if mounting.wind_factor is None else mounting.wind_factor
    return factor * wind, "the file's wind as it stands" if factor == 1.0 else f"the file's wind x {factor:g}"


def wind_coefficient(scenario: Scenario, wind: Floats) -> Floats:
    """Heat transfer coefficient of the outermost face to the air, by the scenario's relation.

    Parameters
    ----------
    scenario
        Its relation and, where that needs it, its building.
    wind
        At the collector, ``(n,)`` [m/s].

    Returns
    -------
    ndarray
        ``(n,)`` [W/m2K].
    """
    building = {"building_length": scenario.mounting.building_length_m} if scenario.models.wind == "mitchell" else {}
    return WIND_RELATIONS[scenario.models.wind].coefficient(wind, **building)


def _plane(scenario: Scenario, *, weather: WeatherYear, sun: Sun) -> PlaneIrradiance:
    mounting = scenario.mounting
    return on_plane(
        weather,
        sun,
        tilt_deg=mounting.tilt_deg,
        azimuth_deg=mounting.azimuth_deg,
        albedo=_albedo(scenario, weather=weather),
        model=scenario.models.tilted_sky,
    )


def _albedo(scenario: Scenario, *, weather: WeatherYear) -> float | Floats:
    albedo = scenario.place.albedo
    if not isinstance(albedo, str):
        return albedo
    if weather.albedo is None:
        what, do = "albedo = 'file', but the file has no usable albedo", "give place.albedo as a number, 0 to 1"
        raise InputError(Problem(where=weather.file, what=what, do=do))
    return weather.albedo


def _surroundings(scenario: Scenario, *, weather: WeatherYear, sun: Sun) -> Surroundings:
    models = scenario.models
    wind, _ = wind_at_collector(scenario, weather.wind)
    t_sky = sky_temperature(
        weather, solar_hour=sun.solar_hour, model=models.sky, pressure_term=models.sky_pressure_term
    )
    return Surroundings(
        t_air=weather.t_air,
        t_sky=np.asarray(t_sky),
        t_ground=weather.t_air,
        h_wind=wind_coefficient(scenario, wind),
        wind=wind,
    )
