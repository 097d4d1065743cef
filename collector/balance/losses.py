"""The loss network: outside air and sky, covers with their gas gaps, plate, back and edge."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from collector.build.collector import Collector
from collector.physics.convection import air, gap_nusselt
from collector.physics.radiation import parallel_plates_factor, radiative_flux, sky_view_factor
from weather.year import Floats, Mask

__all__ = ["Gap", "Losses", "Network", "Step", "Surroundings", "gap_rayleigh", "network_of", "newton_step"]


@dataclass(frozen=True, kw_only=True)
class Surroundings:
    """What the collector faces, each ``(n,)``: air, sky and ground [K], wind coefficient [W/m2K]."""

    t_air: Floats
    t_sky: Floats
    t_ground: Floats
    h_wind: Floats

    def at(self, hours: Mask | slice) -> Surroundings:
        """Return the same for some of the hours."""
        return Surroundings(**{name: column[hours] for name, column in vars(self).items()})


class Gap(NamedTuple):
    """One gas layer: thickness [m], long-wave exchange factor of its faces, length over thickness."""

    thickness: float
    exchange: float
    aspect: float


@dataclass(frozen=True, kw_only=True)
class Network:
    """Everything of a collector that its losses depend on.

    Parameters
    ----------
    gaps
        Outermost first; empty for an unglazed plate.
    eps_front
        Emittance of the outermost face.
    sky_share
        Share of the front's long wave that goes to the sky; the rest goes to the ground.
    tilt_deg
        From the horizontal [deg].
    pressure
        Of the air in the gaps [Pa].
    u_back, u_edge
        Plate to outside air [W/m2K].
    """

    gaps: tuple[Gap, ...]
    eps_front: float
    sky_share: float
    tilt_deg: float
    pressure: float
    u_back: float
    u_edge: float


class Losses(NamedTuple):
    """Heat leaving the plate ``(n,)`` [W/m2], and what each cover fails to balance by, ``(covers, n)`` [W/m2]."""

    convection: Floats
    radiation: Floats
    back: Floats
    edge: Floats
    cover_residual: Floats

    @property
    def top(self) -> Floats:
        """Through the front [W/m2]."""
        return self.convection + self.radiation

    @property
    def total(self) -> Floats:
        """All of them [W/m2]."""
        return self.top + self.back + self.edge


class Step(NamedTuple):
    """The network linearised at a state, covers eliminated.

    With the covers free to follow, the plate loses ``loss + slope * (t - t_plate)`` for a plate at t; ``cover_shift`` and
    ``cover_follow``, each ``(covers, n)``, say how far each cover moves: shift + follow times the move of the node beneath it.
    """

    losses: Losses
    loss: Floats
    slope_top: Floats
    slope: Floats
    cover_shift: list[Floats]
    cover_follow: list[Floats]

    def move(self, *, plate: Floats) -> Floats:
        """Moves of all nodes for a move of the plate, from the outside in, ``(covers + 1, n)`` [K]."""
        moves = [plate]
        for shift, follow in zip(reversed(self.cover_shift), reversed(self.cover_follow), strict=True):
            moves.append(shift + follow * moves[-1])
        return np.array(moves[::-1])


def network_of(collector: Collector, *, pressure: float) -> Network:
    """Loss network of a collector.

    Parameters
    ----------
    collector
        As built and mounted.
    pressure
        Air pressure of the place [Pa].

    Returns
    -------
    Network
        Scalars only.
    """
    emittances = [*(cover.emittance for cover in collector.covers), collector.absorber.emittance]
    gaps = tuple(
        Gap(cover.gap, parallel_plates_factor(upper, lower), collector.length / cover.gap)
        for cover, upper, lower in zip(collector.covers, emittances[:-1], emittances[1:], strict=True)
    )
    return Network(
        gaps=gaps,
        eps_front=emittances[0],
        sky_share=1.0 if collector.whole_sky else sky_view_factor(collector.tilt_deg),
        tilt_deg=collector.tilt_deg,
        pressure=pressure,
        u_back=collector.u_back,
        u_edge=collector.u_edge,
    )


def newton_step(network: Network, around: Surroundings, *, sun_on_covers: Floats, nodes: Floats) -> Step:
    """Linearise the losses at a state and eliminate the covers, from the outside in.

    Parameters
    ----------
    network, around
        The collector and what it faces, n hours.
    sun_on_covers
        Sunlight absorbed in each cover, ``(covers, n)`` [W/m2].
    nodes
        Temperatures, covers from the outside in and then the plate, ``(covers + 1, n)`` [K].

    Returns
    -------
    Step
        The plate's loss with its true slope, and how the covers follow.
    """
    convection, radiation, slope = _outside(network, around, nodes[0])
    leaving = relaxed = convection + radiation
    residuals, shifts, follows = [], [], []
    for gap, sun, upper, lower in zip(network.gaps, sun_on_covers, nodes[:-1], nodes[1:], strict=True):
        convection, radiation, by_upper, by_lower = _through_gap(network, gap, t_upper=upper, t_lower=lower)
        arriving = convection + radiation
        residuals.append(sun + arriving - leaving)
        pivot = slope - by_upper
        shift, follow = (sun + arriving - relaxed) / pivot, by_lower / pivot
        relaxed, slope = arriving + by_upper * shift, by_lower + by_upper * follow
        leaving = arriving
        shifts.append(shift)
        follows.append(follow)
    above_air = nodes[-1] - around.t_air
    back, edge = network.u_back * above_air, network.u_edge * above_air
    losses = Losses(convection, radiation, back, edge, np.array(residuals).reshape(len(residuals), above_air.size))
    return Step(losses, relaxed + back + edge, slope, slope + (network.u_back + network.u_edge), shifts, follows)


def _outside(network: Network, around: Surroundings, t_front: Floats) -> tuple[Floats, Floats, Floats]:
    """Convection and radiation from the outermost face, and the slope of both together."""
    share = network.sky_share
    radiation, slope, _ = radiative_flux(t_front, around.t_sky, factor=network.eps_front * share)
    if share < 1.0:
        to_ground, ground_slope, _ = radiative_flux(t_front, around.t_ground, factor=network.eps_front * (1.0 - share))
        radiation, slope = radiation + to_ground, slope + ground_slope
    return around.h_wind * (t_front - around.t_air), radiation, slope + around.h_wind


def _through_gap(network: Network, gap: Gap, *, t_upper: Floats, t_lower: Floats) -> tuple[Floats, Floats, Floats, Floats]:
    """Convection and radiation upward through a gap, and the slopes of both together to either face."""
    gas = air(0.5 * (t_upper + t_lower), pressure=network.pressure)
    difference = t_lower - t_upper
    rayleigh = gas.rayleigh * gap.thickness**3 * difference
    nusselt, climb = gap_nusselt(rayleigh, tilt_deg=network.tilt_deg, aspect=gap.aspect)
    film = gas.conductivity / gap.thickness
    convection = nusselt * film * difference
    by_difference = film * (nusselt + climb)
    by_mean = 0.5 * difference * (nusselt * (gas.conductivity_slope / gap.thickness) + film * climb * gas.rayleigh_log_slope)
    radiation, by_lower, by_upper = radiative_flux(t_lower, t_upper, factor=gap.exchange)
    return convection, radiation, by_upper - by_difference + by_mean, by_lower + by_difference + by_mean


def gap_rayleigh(network: Network, *, nodes: Floats) -> list[Floats]:
    """Rayleigh number of each gap, for judging whether its relation covers it.

    Parameters
    ----------
    network
        The collector.
    nodes
        As for ``newton_step``, ``(covers + 1, n)`` [K].

    Returns
    -------
    list of ndarray
        Outermost first, each ``(n,)``.
    """
    return [
        air(0.5 * (upper + lower), pressure=network.pressure).rayleigh * gap.thickness**3 * (lower - upper)
        for gap, upper, lower in zip(network.gaps, nodes[:-1], nodes[1:], strict=True)
    ]
