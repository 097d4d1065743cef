"""Steady heat balance of every hour: running at an inlet or mean fluid temperature, or standing still."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from collector.balance.losses import Losses, Network, Step, Surroundings, newton_step
from collector.balance.optics import Absorbed
from collector.build.collector import Collector
from collector.physics.convection import tube_nusselt
from collector.physics.fin import capacity_ratio_factor, efficiency_factor, fin_efficiency, plate_to_fluid_resistance
from collector.physics.fluids import liquid, valid_range
from weather.year import Floats, Mask

__all__ = ["Feed", "SteadyState", "Stream", "Uptake", "operate", "solve_running", "solve_stagnation", "stream_of"]

TOLERANCE = 1e-8  # W/m2, of every node's balance
MOST_ITERATIONS = 60
LONGEST_STEP = 60.0  # K
SETTLED = 4  # iterations after which the fluid's properties stay at a mean temperature found to 1e-4 K


class Feed(NamedTuple):
    """Fluid temperature held fixed [K]: at the inlet, or as the mean along the flow."""

    temperature: float
    at_inlet: bool


@dataclass(frozen=True, kw_only=True)
class Stream:
    """Film coefficient [W/m2K] and heat capacity flow [W/m2K] of one tube's flow, over fluid temperature ``(m,)`` [K]."""

    t: Floats
    h_film: Floats
    capacity_rate: Floats
    reynolds: Floats

    def film(self, t: Floats) -> Floats:
        """Film coefficient at a mean fluid temperature, held at the ends of the fluid's range [W/m2K]."""
        return np.asarray(np.interp(t, self.t, self.h_film))

    def capacity(self, t: Floats) -> Floats:
        """Heat capacity flow per collector area, held at the ends of the fluid's range [W/m2K]."""
        return np.asarray(np.interp(t, self.t, self.capacity_rate))


class Coupling(NamedTuple):
    """How the plate hangs on the fed temperature: conductance [W/m2K], F', F_R, mean fluid temperature [K]."""

    conductance: Floats
    f_prime: Floats
    f_r: Floats
    t_mean: Floats


@dataclass(frozen=True, kw_only=True)
class SteadyState:
    """Solved hours.

    Parameters
    ----------
    nodes
        Covers from the outside in, then the plate, ``(covers + 1, n)`` [K].
    useful
        Heat taken away by the fluid, ``(n,)`` [W/m2].
    losses
        By path, ``(n,)`` [W/m2].
    slope, slope_top
        Slope of all losses and of the front's at the plate's temperature, ``(n,)`` [W/m2K].
    t_mean, t_outlet
        Mean and outlet fluid temperature, ``(n,)`` [K]; the plate's own where nothing flows.
    f_prime, f_r
        Collector efficiency factor and heat removal factor, ``(n,)``; of the slope of the loss.
    residual
        Largest imbalance of plate and covers, ``(n,)`` [W/m2].
    converged
        Whether every balance of the hour is met, ``(n,)``.
    """

    nodes: Floats
    useful: Floats
    losses: Losses
    slope: Floats
    slope_top: Floats
    t_mean: Floats
    t_outlet: Floats
    f_prime: Floats
    f_r: Floats
    residual: Floats
    converged: Mask

    @property
    def t_plate(self) -> Floats:
        """Mean plate temperature, ``(n,)`` [K]."""
        return self.nodes[-1]


def stream_of(collector: Collector) -> Stream:
    """Film and heat capacity of the flow in one tube, tabulated over the fluid's range.

    Parameters
    ----------
    collector
        Its fluid, flow and tubes.

    Returns
    -------
    Stream
        At steps of about half a kelvin.
    """
    low, high = valid_range(collector.fluid, mass_fraction=collector.mass_fraction)
    t = np.linspace(low, high, 2 * math.ceil(high - low) + 1)
    fluid = liquid(collector.fluid, mass_fraction=collector.mass_fraction, t=t)
    absorber = collector.absorber
    per_tube = collector.flow * absorber.pitch * collector.length
    reynolds = 4.0 * per_tube / (math.pi * absorber.inner * fluid.viscosity)
    prandtl = fluid.viscosity * fluid.heat_capacity / fluid.conductivity
    nusselt = tube_nusselt(reynolds=reynolds, prandtl=prandtl, slenderness=absorber.inner / collector.length)
    return Stream(
        t=t,
        h_film=nusselt * fluid.conductivity / absorber.inner,
        capacity_rate=collector.flow * fluid.heat_capacity,
        reynolds=reynolds,
    )


@dataclass(frozen=True, kw_only=True)
class Uptake:
    """A collector's tubes with their stream and the temperature they are fed at."""

    collector: Collector
    stream: Stream
    feed: Feed

    def coupling(self, slope: Floats, *, t_plate: Floats, t_mean: Floats) -> Coupling:
        """Conductance from the mean plate to the fed temperature at a given slope of the loss.

        Eliminating the absorbed power from q = F_R (S - U (t_in - t_0)) and the mean plate temperature that goes with it
        leaves q = F_R U / (1 - F_R) (t_plate - t_in): neither the sun nor the surroundings stand in it.

        Parameters
        ----------
        slope
            Of the loss, ``(n,)`` [W/m2K].
        t_plate, t_mean
            Mean plate and, so far, mean fluid temperature, ``(n,)`` [K].

        Returns
        -------
        Coupling
            With a mean fluid temperature that is one step better.

        Notes
        -----
        **Source**: Duffie & Beckman, Eq. 6.7.6, 6.9.2 and 6.9.4; held by ``tests/test_steady.py`` and the independent solution.
        """
        absorber = self.collector.absorber
        fin = fin_efficiency(
            slope,
            conductivity=absorber.conductivity,
            thickness=absorber.thickness,
            pitch=absorber.pitch,
            outer=absorber.outer,
        )
        resistance = plate_to_fluid_resistance(
            slope,
            fin=fin,
            pitch=absorber.pitch,
            outer=absorber.outer,
            inner=absorber.inner,
            bond_resistance=absorber.bond_resistance,
            h_film=self.stream.film(t_mean),
        )
        f_prime = efficiency_factor(slope, resistance)
        f_r = f_prime * capacity_ratio_factor(slope, f_prime=f_prime, capacity_rate=self.stream.capacity(t_mean))
        if not self.feed.at_inlet:
            return Coupling(1.0 / resistance, f_prime, f_r, t_mean)
        conductance = f_r * slope / (1.0 - f_r)
        useful = conductance * (t_plate - self.feed.temperature)
        return Coupling(conductance, f_prime, f_r, t_plate - useful * resistance)

    def outlet(self, t_mean: Floats, *, useful: Floats) -> Floats:
        """Outlet temperature: from the inlet by the heat taken up, or half of that above the mean (straight rise) [K]."""
        rise = useful / self.stream.capacity(t_mean)
        return np.asarray(self.feed.temperature + (rise if self.feed.at_inlet else 0.5 * rise))


def solve_stagnation(network: Network, around: Surroundings, absorbed: Absorbed) -> SteadyState:
    """Temperatures with no flow: what the sun brings in leaves as loss.

    Parameters
    ----------
    network, around, absorbed
        Collector, what it faces and the sun it absorbs, n hours.

    Returns
    -------
    SteadyState
        Useful heat is 0 in every hour.
    """
    loosely = 2.0 + network.u_back + network.u_edge + (0.0 if network.gaps else around.h_wind)
    t_plate = around.t_air + np.minimum(absorbed.plate / loosely, 120.0)
    return _solve(network, around, absorbed, nodes=_first_guess(network, around, t_plate=t_plate), uptake=None)


def solve_running(network: Network, around: Surroundings, absorbed: Absorbed, *, uptake: Uptake) -> SteadyState:
    """Temperatures and gain with the fluid flowing, whichever way the heat goes.

    Parameters
    ----------
    network, around, absorbed
        Collector, what it faces and the sun it absorbs, n hours.
    uptake
        Tubes, stream and fed temperature.

    Returns
    -------
    SteadyState
        The caller keeps the hours with a gain; stagnation above the fed temperature tells which.
    """
    t_plate = uptake.feed.temperature + absorbed.plate / 100.0
    return _solve(network, around, absorbed, nodes=_first_guess(network, around, t_plate=t_plate), uptake=uptake)


def operate(
    network: Network, around: Surroundings, absorbed: Absorbed, *, uptake: Uptake, still: SteadyState
) -> tuple[SteadyState, Mask]:
    """Hours as a pump would have them: running where there is heat to gain, standing still otherwise.

    Parameters
    ----------
    network, around, absorbed, uptake
        As for ``solve_running``.
    still
        The same hours at stagnation. A plate that stagnates above the fed temperature has heat to give, and only then.

    Returns
    -------
    SteadyState
        All n hours.
    ndarray of bool
        Which of them run, ``(n,)``.
    """
    on = still.t_plate > uptake.feed.temperature
    running = solve_running(network, around.at(on), absorbed.at(on), uptake=uptake)
    return _merge(still, running, on), on


def _merge(whole: SteadyState, part: SteadyState, hours: Mask) -> SteadyState:
    def put(into: Floats, values: Floats) -> Floats:
        merged = into.copy()
        merged[..., hours] = values
        return merged

    fields = {
        name: Losses(*map(put, value, getattr(part, name))) if isinstance(value, Losses) else put(value, getattr(part, name))
        for name, value in vars(whole).items()
    }
    return SteadyState(**fields)


def _first_guess(network: Network, around: Surroundings, *, t_plate: Floats) -> Floats:
    covers = len(network.gaps)
    inward = (np.arange(covers + 1) + 0.4) / (covers + 0.4)
    return np.asarray(around.t_air + np.outer(np.minimum(inward, 1.0), t_plate - around.t_air))


def _solve(
    network: Network, around: Surroundings, absorbed: Absorbed, *, nodes: Floats, uptake: Uptake | None
) -> SteadyState:
    """Newton on plate and covers of all hours at once; hours that balance drop out."""
    solved, hours = nodes.copy(), np.arange(nodes.shape[1])
    solved_mean = np.full(hours.size, uptake.feed.temperature if uptake else 0.0)
    here, sun, t_mean = around, absorbed, solved_mean
    for iteration in range(MOST_ITERATIONS):
        step = newton_step(network, here, sun_on_covers=sun.covers, nodes=nodes)
        draw = _draw(uptake, step, t_plate=nodes[-1], t_mean=t_mean, settle=iteration < SETTLED)
        going = _imbalance(step.losses, sun=sun.plate, useful=draw.useful) > TOLERANCE
        solved[:, hours], solved_mean[hours] = nodes, draw.t_mean
        if not going.any():
            break
        plate = (sun.plate - draw.useful - step.loss) / (step.slope + draw.slope)
        longest = LONGEST_STEP if iteration < 20 else LONGEST_STEP / 2 ** (iteration - 19)
        nodes, t_mean = nodes + np.clip(step.move(plate=plate), -longest, longest), draw.t_mean
        if np.count_nonzero(going) < 0.8 * going.size:
            nodes, hours, here, sun = nodes[:, going], hours[going], here.at(going), sun.at(going)
            t_mean = t_mean[going]
    return _state(network, around, absorbed, nodes=solved, t_mean=solved_mean, uptake=uptake)


class _Draw(NamedTuple):
    """Heat that the fluid draws [W/m2], its slope to the plate's temperature [W/m2K], mean fluid temperature [K]."""

    useful: Floats
    slope: Floats
    t_mean: Floats


def _draw(uptake: Uptake | None, step: Step, *, t_plate: Floats, t_mean: Floats, settle: bool) -> _Draw:
    """Heat drawn at a plate temperature. The fluid's properties follow its temperature until they are settled."""
    if uptake is None:
        none = np.zeros_like(t_plate)
        return _Draw(none, none, t_mean)
    coupling = uptake.coupling(step.slope, t_plate=t_plate, t_mean=t_mean)
    useful = coupling.conductance * (t_plate - uptake.feed.temperature)
    return _Draw(useful, coupling.conductance, coupling.t_mean if settle else t_mean)


def _imbalance(losses: Losses, *, sun: Floats, useful: Floats | float) -> Floats:
    """Largest imbalance of plate and covers in every hour."""
    plate = np.abs(sun - useful - losses.total)
    return np.maximum(plate, np.abs(losses.cover_residual).max(axis=0)) if len(losses.cover_residual) else plate


def _state(network: Network, around: Surroundings, absorbed: Absorbed, *, nodes: Floats, t_mean: Floats, uptake: Uptake | None) -> SteadyState:
    """Everything about the hours at the temperatures found, each balance taken afresh."""
    step = newton_step(network, around, sun_on_covers=absorbed.covers, nodes=nodes)
    t_plate = nodes[-1]
    useful = np.zeros_like(t_plate)
    t_outlet, f_prime, f_r = t_plate, np.ones_like(t_plate), np.zeros_like(t_plate)
    if uptake is None:
        t_mean = t_plate
    else:
        conductance, f_prime, f_r, t_mean = uptake.coupling(step.slope, t_plate=t_plate, t_mean=t_mean)
        useful = conductance * (t_plate - uptake.feed.temperature)
        t_outlet = uptake.outlet(t_mean, useful=useful)
    residual = _imbalance(step.losses, sun=absorbed.plate, useful=useful)
    return SteadyState(
        nodes=nodes,
        useful=useful,
        losses=step.losses,
        slope=step.slope,
        slope_top=step.slope_top,
        t_mean=t_mean,
        t_outlet=t_outlet,
        f_prime=f_prime,
        f_r=f_r,
        residual=residual,
        converged=residual < 1e-6,
    )
