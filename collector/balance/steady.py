"""Steady heat balance of every hour: running at an inlet or mean fluid temperature, or standing still."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from collector.balance.losses import Facing, Losses, Step, Surroundings
from collector.balance.optics import Absorbed
from collector.build.collector import Collector
from collector.physics.convection import tube_nusselt
from collector.physics.fin import capacity_ratio_factor, efficiency_factor, fin_efficiency, plate_to_fluid_resistance
from collector.physics.fluids import Liquid, liquid, valid_range
from weather.year import Floats, Mask

__all__ = [
    "Feed",
    "SteadyState",
    "Stream",
    "Uptake",
    "fluid_table",
    "operate",
    "solve_running",
    "solve_stagnation",
    "stream_of",
]

TOLERANCE = 1e-8  # W/m2, of every node's balance
SOLVED = 1e-6  # W/m2, beyond which an hour counts as not converged
MOST_ITERATIONS = 60
LONGEST_STEP = 60.0  # K
SETTLED = 0.02  # K, between the mean fluid temperature and the one its film is taken at
MOST_FILMS = 8  # iterations after which the film stays as it is


class Network(Protocol):
    """Losses of a collector, however they are known."""

    @property
    def gaps(self) -> Sequence[object]:
        """Gas gaps, one a cover."""

    @property
    def u_back(self) -> float:
        """Plate to air through the back [W/m2K]."""

    @property
    def u_edge(self) -> float:
        """Plate to air through the edges [W/m2K]."""

    def facing(self, around: Surroundings) -> Facing:
        """Return what the front faces."""

    def step(self, facing: Facing, *, sun_on_covers: Floats, nodes: Floats) -> Step:
        """Return the losses linearised at a state."""


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

    def at(self, t: Floats) -> Flow:
        """Return both at a mean fluid temperature, held at the ends of the fluid's range."""
        return Flow(np.interp(t, self.t, self.h_film), np.interp(t, self.t, self.capacity_rate))


class Flow(NamedTuple):
    """Film coefficient in the tube [W/m2K] and heat capacity flow per collector area [W/m2K], one or ``(n,)``."""

    h_film: Floats
    capacity_rate: Floats


class Coupling(NamedTuple):
    """How the plate hangs on the fed temperature: conductance [W/m2K], F', F_R, and plate to mean fluid [m2K/W]."""

    conductance: Floats
    f_prime: Floats
    f_r: Floats
    resistance: Floats


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
        return np.asarray(self.nodes[-1])

    def at(self, hours: Mask) -> SteadyState:
        """Return the same for some of the hours."""
        return self._each(lambda values, _: values[..., hours], self)

    def replaced(self, hours: Mask, other: SteadyState) -> SteadyState:
        """Return these hours with those of the mask taken from another, which has only them."""

        def put(values: Floats, new: Floats) -> Floats:
            merged = values.copy()
            merged[..., hours] = new
            return merged

        return self._each(put, other)

    def _each(self, change: Callable[[Floats, Floats], Floats], other: SteadyState) -> SteadyState:
        changed = {name: change(value, getattr(other, name)) for name, value in vars(self).items() if name != "losses"}
        return SteadyState(losses=Losses(*map(change, self.losses, other.losses)), **changed)  # type: ignore[arg-type] # `converged` is a mask, sliced and put like the others


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
    t, fluid = fluid_table(collector.fluid, mass_fraction=collector.mass_fraction)
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


@lru_cache(maxsize=16)
def fluid_table(name: str, *, mass_fraction: float) -> tuple[Floats, Liquid]:
    """Return temperatures over a fluid's range and its properties there, kept for the next collector with the same fluid."""
    low, high = valid_range(name, mass_fraction=mass_fraction)
    t = np.linspace(low, high, 2 * math.ceil(high - low) + 1)
    return t, liquid(name, mass_fraction=mass_fraction, t=t)


@dataclass(frozen=True, kw_only=True)
class Uptake:
    """A collector's tubes with their stream, the temperature they are fed at, and how far above it the pump starts and stops."""

    stream: Stream
    feed: Feed
    collector: Collector | None = None
    start_above: float = 0.0
    stop_above: float = 0.0

    def coupling(self, slope: Floats, *, flow: Flow) -> Coupling:
        """Conductance from the mean plate to the fed temperature at a given slope of the loss.

        Eliminating the absorbed power from q = F_R (S - U (t_in - t_0)) and the mean plate temperature that goes with it
        leaves q = F_R U / (1 - F_R) (t_plate - t_in): neither the sun nor the surroundings stand in it.

        Parameters
        ----------
        slope
            Of the loss, ``(n,)`` [W/m2K].
        flow
            At the mean fluid temperature.

        Returns
        -------
        Coupling
            To the inlet, or to the mean where that is held.

        Notes
        -----
        **Source**: Duffie & Beckman, Eq. 6.7.6, 6.9.2 and 6.9.4; held by ``tests/test_steady.py`` and the independent solution.
        """
        assert self.collector is not None  # noqa: S101 # known by its build; a test report couples in its own way
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
            h_film=flow.h_film,
        )
        f_prime = efficiency_factor(slope, resistance)
        f_r = f_prime * capacity_ratio_factor(slope, f_prime=f_prime, capacity_rate=flow.capacity_rate)
        conductance = f_r * slope / (1.0 - f_r) if self.feed.at_inlet else 1.0 / resistance
        return Coupling(conductance, f_prime, f_r, resistance)

    def useful(self, coupling: Coupling, *, t_plate: Floats) -> Floats:
        """Heat taken up at a plate temperature [W/m2]."""
        return coupling.conductance * (t_plate - self.feed.temperature)

    def mean(self, coupling: Coupling, *, t_plate: Floats, useful: Floats) -> Floats:
        """Mean fluid temperature [K]."""
        if not self.feed.at_inlet:
            return np.full_like(t_plate, self.feed.temperature)
        return t_plate - useful * coupling.resistance

    def outlet(self, *, flow: Flow, useful: Floats) -> Floats:
        """Outlet temperature: from the inlet by the heat taken up, or half of that above the mean (straight rise) [K]."""
        rise = useful / flow.capacity_rate
        return self.feed.temperature + (rise if self.feed.at_inlet else 0.5 * rise)


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
    first = first_guess(network, around, t_plate=t_plate)
    return _solve(network, around, absorbed, nodes=first, uptake=None, t_mean=np.zeros_like(t_plate))


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
        Hours that lose heat have a negative useful gain.
    """
    feed = uptake.feed.temperature
    flow = uptake.stream.at(np.array([feed]))
    loss = 4.0 + network.u_back + network.u_edge  # W/m2K, near enough for a first guess
    conductance = uptake.coupling(np.array([loss]), flow=flow).conductance
    useful = absorbed.plate - loss * (feed - around.t_air)
    t_plate = feed + useful / (conductance + loss)
    t_mean = feed + (0.45 / flow.capacity_rate) * np.maximum(useful, 0.0)
    first = first_guess(network, around, t_plate=t_plate)
    return _solve(network, around, absorbed, nodes=first, uptake=uptake, t_mean=t_mean)


def operate(network: Network, around: Surroundings, absorbed: Absorbed, *, uptake: Uptake) -> tuple[SteadyState, Mask]:
    """Hours as a pump would have them: running where there is heat to gain, standing still otherwise.

    Parameters
    ----------
    network, around, absorbed, uptake
        As for ``solve_running``.

    Returns
    -------
    SteadyState
        The hours that run, and only those.
    ndarray of bool
        Which of the n hours they are, ``(n,)``.

    Notes
    -----
    The gain has the sign of the absorbed power less the loss of a plate at the fed temperature, so that an hour that loses
    when solved is an hour to stand still. Hours are left out unsolved where nothing around is warmer than the fluid and all
    sunlight absorbed, the covers' included, is less than what goes through back and edges alone.
    """
    feed = uptake.feed.temperature
    warmest = np.maximum(np.maximum(around.t_air, around.t_sky), around.t_ground)
    least_loss = (network.u_back + network.u_edge) * (feed - around.t_air)
    on = (absorbed.plate + absorbed.covers.sum(axis=0) > least_loss) | (warmest > feed)
    state = solve_running(network, around.at(on), absorbed.at(on), uptake=uptake)
    gains = state.useful > 0.0
    on[on] = gains
    return state.at(gains), on


def first_guess(network: Network, around: Surroundings, *, t_plate: Floats) -> Floats:
    covers = len(network.gaps)
    inward = (np.arange(covers + 1) + 0.4) / (covers + 0.4)
    return np.asarray(around.t_air + np.outer(np.minimum(inward, 1.0), t_plate - around.t_air))


def _solve(
    network: Network, around: Surroundings, absorbed: Absorbed, *, nodes: Floats, uptake: Uptake | None, t_mean: Floats
) -> SteadyState:
    """Newton on plate and covers of all hours at once; hours that balance are put away."""
    hours = np.arange(nodes.shape[1])
    whole = network.facing(around)
    here, sun, flow, t_film = whole, absorbed, _flow(uptake, t_mean), t_mean
    solved, solved_flow = nodes, flow
    for iteration in range(MOST_ITERATIONS):
        step = network.step(here, sun_on_covers=sun.covers, nodes=nodes)
        useful, conductance, t_mean = _drawn(uptake, flow, slope=step.slope, t_plate=nodes[-1])
        late = (np.abs(t_mean - t_film) > SETTLED) & (iteration < MOST_FILMS)
        going = (_imbalance(step.losses, sun=sun.plate, useful=useful) > TOLERANCE) | late
        if not going.any():
            break
        plate = (sun.plate - useful - step.loss) / (step.slope + conductance)
        longest = LONGEST_STEP if iteration < 20 else LONGEST_STEP / 2 ** (iteration - 19)
        nodes, held = nodes + np.clip(step.move(plate=plate), -longest, longest), flow
        if late.any():
            flow, t_film = np.where(late, _flow(uptake, t_mean), flow), np.where(late, t_mean, t_film)
        if np.count_nonzero(going) < 0.7 * going.size:
            solved, solved_flow = _put(solved, nodes, hours), _put(solved_flow, held, hours)
            nodes, flow, hours, here, sun = nodes[:, going], flow[:, going], hours[going], here.at(going), sun.at(going)
            t_film = t_film[going]
    solved, solved_flow = _put(solved, nodes, hours), _put(solved_flow, flow, hours)
    if hours.size < solved.shape[1] or going.any():
        step = network.step(whole, sun_on_covers=absorbed.covers, nodes=solved)
    return _state(step, absorbed, nodes=solved, flow=solved_flow, uptake=uptake)


def _put(whole: Floats, part: Floats, hours: NDArray[np.intp]) -> Floats:
    """Some hours' columns put in their places; the part itself where it is the whole."""
    if part.shape == whole.shape:
        return part
    merged = whole.copy()
    merged[:, hours] = part
    return merged


def _flow(uptake: Uptake | None, t_mean: Floats) -> Floats:
    """Film and heat capacity flow at a mean fluid temperature, ``(2, n)``; no rows where nothing flows."""
    return np.array(uptake.stream.at(t_mean)) if uptake else np.empty((0, t_mean.size))


def _drawn(uptake: Uptake | None, flow: Floats, *, slope: Floats, t_plate: Floats) -> tuple[Floats, Floats, Floats]:
    """Heat that the fluid draws, its slope to the plate's temperature, and the mean fluid temperature."""
    if uptake is None:
        none = np.zeros_like(t_plate)
        return none, none, none
    coupling = uptake.coupling(slope, flow=Flow(*flow))
    useful = uptake.useful(coupling, t_plate=t_plate)
    return useful, coupling.conductance, uptake.mean(coupling, t_plate=t_plate, useful=useful)


def _imbalance(losses: Losses, *, sun: Floats, useful: Floats | float) -> Floats:
    """Largest imbalance of plate and covers in every hour."""
    plate = np.abs(sun - useful - losses.total)
    return np.maximum(plate, np.abs(losses.cover_residual).max(axis=0)) if len(losses.cover_residual) else plate


def _state(step: Step, absorbed: Absorbed, *, nodes: Floats, flow: Floats, uptake: Uptake | None) -> SteadyState:
    """Everything about the hours at the temperatures found, with the network taken there."""
    t_mean = t_outlet = t_plate = nodes[-1]
    useful, f_prime, f_r = np.zeros_like(t_plate), np.ones_like(t_plate), np.zeros_like(t_plate)
    if uptake:
        coupling = uptake.coupling(step.slope, flow=Flow(*flow))
        f_prime, f_r = coupling.f_prime, coupling.f_r
        useful = uptake.useful(coupling, t_plate=t_plate)
        t_mean = uptake.mean(coupling, t_plate=t_plate, useful=useful)
        t_outlet = uptake.outlet(flow=Flow(*flow), useful=useful)
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
        converged=residual < SOLVED,
    )
