"""One operating point by hand: sun, air, sky and wind as given, and the heat that comes of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from scipy.constants import atm, zero_Celsius

from collector.balance.losses import Surroundings
from collector.balance.model import model_of
from collector.balance.steady import Feed, SteadyState, solve_running, solve_stagnation
from collector.build.collector import Collector, collector_of
from collector.build.scenario import Scenario
from collector.physics.fluids import valid_range
from collector.study.cautions import at_stagnation, when_running
from collector.study.plate import read_notices
from collector.study.year import wind_coefficient
from weather.errors import InputError, Problem
from weather.plane import PlaneIrradiance

__all__ = ["BY_REPORT", "Point", "solve_point"]

BY_REPORT = "a test report gives one loss from the mean fluid: it stands under front convection, and the plate is the mean fluid"
BOUNDS = {
    "beam": (0.0, 1500.0, "W/m2"),
    "sky_diffuse": (0.0, 1500.0, "W/m2"),
    "ground": (0.0, 1500.0, "W/m2"),
    "incidence": (0.0, 90.0, "deg"),
    "air": (-80.0, 70.0, "C"),
    "sky_temp": (-120.0, 80.0, "C"),
    "ground_temp": (-80.0, 90.0, "C"),
    "wind": (0.0, 75.0, "m/s"),
    "inlet": (-50.0, 200.0, "C"),
    "mean": (-50.0, 200.0, "C"),
}


@dataclass(frozen=True, kw_only=True)
class Point:
    """What stands on the collector at one moment.

    Parameters
    ----------
    beam, sky_diffuse, ground
        Irradiance on the plane by component [W/m2].
    incidence
        Of the beam [deg].
    air, sky_temp, ground_temp
        [C]
    wind
        At the collector [m/s].
    inlet, mean
        Fluid temperature held [C]; neither is stagnation.
    """

    beam: float
    sky_diffuse: float
    ground: float
    incidence: float
    air: float
    sky_temp: float
    ground_temp: float
    wind: float
    inlet: float | None = None
    mean: float | None = None

    def __post_init__(self) -> None:
        wrong = [
            Problem(
                where=f"--{name.replace('_', '-')}",
                what="out of range",
                got=f"{value:g}",
                allowed=f"{low:g} to {high:g} {unit}",
            )
            for name, (low, high, unit) in BOUNDS.items()
            if (value := getattr(self, name)) is not None and not low <= value <= high
        ]
        if wrong:
            raise InputError(wrong)

    @property
    def irradiance(self) -> float:
        """On the plane, all components [W/m2]."""
        return self.beam + self.sky_diffuse + self.ground


def solve_point(scenario: Scenario, point: Point) -> dict[str, Any]:
    """Heat balance at one operating point.

    Parameters
    ----------
    scenario
        Its collector, fluid, tilt and relations; its weather is not read.
    point
        What stands on it.

    Returns
    -------
    dict
        Plain numbers, units in the keys, None where a quantity has no meaning. ``U_top`` and ``U_loss`` are slopes at the
        plate's temperature, and F' and F_R belong to that slope; the ``secant`` ones are loss over plate minus air.

    Raises
    ------
    InputError
        The fluid would be frozen.
    """
    pressure, said = _pressure(scenario.place.altitude_m)
    model = model_of(collector_of(scenario), pressure=pressure)
    around = _around(scenario, point)
    absorbed = model.absorbed(_on_plane(point), around)
    feed = _feed(scenario, point)
    if feed is None:
        state = solve_stagnation(model.network, around, absorbed)
    else:
        state = solve_running(model.network, around, absorbed, uptake=model.uptake(feed))
    by_build = isinstance(model.collector, Collector)
    return {
        "title": scenario.title,
        **_temperatures(state, feed),
        "irradiance_W_m2": point.irradiance,
        "absorbed_W_m2": float(absorbed.plate[0]),
        **_fluxes(state, point),
        **_coefficients(state, feed, t_air=point.air + zero_Celsius, by_build=by_build),
        "residual_W_m2": float(state.residual[0]),
        "converged": bool(state.converged[0]),
        "pressure_Pa": pressure,
        "notices": [
            said,
            *([] if by_build else [BY_REPORT]),
            *read_notices(scenario),
            *_notices(scenario, state, feed),
        ],
        "cautions": _cautions(scenario, state, feed),
    }


def _pressure(altitude: float | None) -> tuple[float, str]:
    if altitude is None:
        return atm, "air pressure of sea level: the scenario gives no place.altitude_m"
    from pvlib.atmosphere import alt2pres

    return float(alt2pres(altitude)), f"air pressure of the standard atmosphere at {altitude:g} m"


def _around(scenario: Scenario, point: Point) -> Surroundings:
    one = {name: np.array([getattr(point, key) + zero_Celsius]) for name, key in _TEMPERATURES.items()}
    wind = np.array([point.wind])
    return Surroundings(**one, h_wind=wind_coefficient(scenario, wind), wind=wind)


_TEMPERATURES = {"t_air": "air", "t_sky": "sky_temp", "t_ground": "ground_temp"}


def _on_plane(point: Point) -> PlaneIrradiance:
    return PlaneIrradiance(
        beam=np.array([point.beam]),
        sky=np.array([point.sky_diffuse]),
        horizon=np.zeros(1),
        ground=np.array([point.ground]),
        incidence_deg=np.array([point.incidence]),
        notices=(),
    )


def _feed(scenario: Scenario, point: Point) -> Feed | None:
    held = point.inlet if point.inlet is not None else point.mean
    if held is None:
        return None
    fluid = scenario.fluid
    if held < fluid.coldest_C:
        where, allowed = "--inlet" if point.inlet is not None else "--mean", f"at least {fluid.coldest_C:.1f} C"
        raise InputError(Problem(where=where, what=f"{fluid.name} is frozen", got=f"{held:g} C", allowed=allowed))
    return Feed(held + zero_Celsius, at_inlet=point.inlet is not None)


def _temperatures(state: SteadyState, feed: Feed | None) -> dict[str, Any]:
    plate, mean, outlet = (float(t[0]) - zero_Celsius for t in (state.t_plate, state.t_mean, state.t_outlet))
    covers = [float(t) - zero_Celsius for t in state.nodes[:-1, 0]]
    if feed is None:
        return {"plate_C": plate, "covers_C": covers, "inlet_C": None, "mean_C": None, "outlet_C": None}
    held = round(feed.temperature - zero_Celsius, 9)
    inlet, mean = (held, mean) if feed.at_inlet else (2.0 * held - outlet, held)
    return {"plate_C": plate, "covers_C": covers, "inlet_C": inlet, "mean_C": mean, "outlet_C": outlet}


def _fluxes(state: SteadyState, point: Point) -> dict[str, Any]:
    useful, losses = float(state.useful[0]), state.losses
    return {
        "useful_W_m2": useful,
        "efficiency": useful / point.irradiance if point.irradiance > 0.0 else None,
        "top_W_m2": float(losses.top[0]),
        "top_convection_W_m2": float(losses.convection[0]),
        "top_radiation_W_m2": float(losses.radiation[0]),
        "back_W_m2": float(losses.back[0]),
        "edge_W_m2": float(losses.edge[0]),
    }


def _coefficients(state: SteadyState, feed: Feed | None, *, t_air: float, by_build: bool) -> dict[str, Any]:
    above = float(state.t_plate[0]) - t_air
    over = (lambda loss: float(loss[0]) / above) if abs(above) > 1e-3 else (lambda _: None)
    return {
        "U_top_W_m2K": float(state.slope_top[0]),
        "U_loss_W_m2K": float(state.slope[0]),
        "U_top_secant_W_m2K": over(state.losses.top),
        "U_loss_secant_W_m2K": over(state.losses.total),
        "F_prime": float(state.f_prime[0]) if feed and by_build else None,
        "F_R": float(state.f_r[0]) if feed and by_build else None,
    }


def _notices(scenario: Scenario, state: SteadyState, feed: Feed | None) -> list[str]:
    fluid = scenario.fluid
    low, high = valid_range(fluid.name, mass_fraction=fluid.mass_fraction)
    said = [] if state.converged[0] else ["the balance did not converge: the numbers are not to be trusted"]
    if feed and not low <= state.t_mean[0] <= high:
        span = f"{low - zero_Celsius:.0f} to {high - zero_Celsius:.0f} C"
        said.append(f"{fluid.name}: mean temperature outside the data's {span}, held at its end")
    if feed and state.useful[0] < 0.0:
        said.append("the fluid loses heat at this point: a pump control would stand still")
    return said


def _cautions(scenario: Scenario, state: SteadyState, feed: Feed | None) -> list[str]:
    if feed is None:
        return list(at_stagnation(float(state.t_plate[0]) - zero_Celsius, fluid=scenario.fluid.name))
    return list(when_running(float(state.t_outlet[0]) - zero_Celsius))
