"""Collectors, surroundings and light for tests, built by hand from plain numbers."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from collector.balance.losses import Network, Surroundings, network_of
from collector.balance.optics import Absorbed
from collector.balance.steady import Feed, SteadyState, Uptake, solve_running, solve_stagnation, stream_of
from collector.build.collector import Absorber, Collector, Cover
from weather.plane import PlaneIrradiance

PANE = Cover(refractive_index=1.526, absorption=0.0128, emittance=0.88, gap=0.025)
PLATE = Absorber(
    absorptance=0.95,
    emittance=0.1,
    conductivity=385.0,
    thickness=0.0002,
    pitch=0.1,
    outer=0.01,
    inner=0.009,
    bond_resistance=0.0,
)
COLLECTOR = Collector(
    covers=(PANE,),
    absorber=PLATE,
    u_back=0.8,
    u_edge=0.45,
    length=2.0,
    width=1.1,
    tilt_deg=40.0,
    fluid="water",
    mass_fraction=0.0,
    flow=0.02,
    falling_absorptance=False,
    integrated_diffuse=True,
    whole_sky=False,
)


def collector(*, covers: int = 1, **changes) -> Collector:
    """The collector above with some things changed; keys of the plate go to the plate."""
    plate = {key: changes.pop(key) for key in list(changes) if key in vars(PLATE)}
    return replace(COLLECTOR, covers=(PANE,) * covers, absorber=replace(PLATE, **plate), **changes)


def around(*, t_air=293.15, t_sky=278.15, t_ground=None, h_wind=11.8) -> Surroundings:
    """Surroundings, each a number or an array."""
    values = np.broadcast_arrays(*map(np.asarray, (t_air, t_sky, t_air if t_ground is None else t_ground, h_wind)))
    names = ("t_air", "t_sky", "t_ground", "h_wind")
    return Surroundings(**{name: np.atleast_1d(value).astype(float) for name, value in zip(names, values, strict=True)})


def light(*, beam=0.0, sky=0.0, horizon=0.0, ground=0.0, incidence_deg=0.0) -> PlaneIrradiance:
    """Light on the plane, each component a number or an array."""
    names = ("beam", "sky", "horizon", "ground", "incidence_deg")
    values = np.broadcast_arrays(*map(np.asarray, (beam, sky, horizon, ground, incidence_deg)))
    return PlaneIrradiance(
        **{name: np.atleast_1d(value).astype(float) for name, value in zip(names, values, strict=True)}, notices=()
    )


def absorbed(plate, *, covers: int = 1, each: float = 0.0) -> Absorbed:
    """A given power absorbed in the plate, and the same in each cover."""
    values = np.atleast_1d(np.asarray(plate, dtype=float))
    return Absorbed(plate=values, covers=np.full((covers, values.size), each))


def network(built: Collector) -> Network:
    """Its losses at sea level."""
    return network_of(built, pressure=101_325.0)


def running(built: Collector, facing: Surroundings, sun: Absorbed, *, inlet=None, mean=None) -> SteadyState:
    """The hours with the fluid flowing, temperatures in kelvin."""
    feed = Feed(inlet if mean is None else mean, mean is None)
    uptake = Uptake(collector=built, stream=stream_of(built), feed=feed)
    return solve_running(network(built), facing, sun, uptake=uptake)


def standing(built: Collector, facing: Surroundings, sun: Absorbed) -> SteadyState:
    """The hours at stagnation."""
    return solve_stagnation(network(built), facing, sun)
