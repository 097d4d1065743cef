"""The loss network: outside air and sky, covers with their gas gaps, plate, back and edge."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from collector.build.collector import Collector
from collector.physics.convection import air, gap_nusselt
from collector.physics.emittance_curve import EmittanceCurve
from collector.physics.radiation import SIGMA, parallel_plates_factor, radiative_flux, sky_view_factor
from weather.year import Floats, Mask

__all__ = ["Facing", "Gap", "Losses", "Network", "Step", "Surroundings", "gap_rayleigh", "network_of", "newton_step"]


@dataclass(frozen=True, kw_only=True)
class Surroundings:
    """What the collector faces, each ``(n,)``: air, sky and ground [K], wind coefficient [W/m2K], and wind at it [m/s]."""

    t_air: Floats
    t_sky: Floats
    t_ground: Floats
    h_wind: Floats
    wind: Floats | None = None

    def at(self, hours: Mask | slice) -> Surroundings:
        """Return the same for some of the hours."""
        known = {name: column for name, column in vars(self).items() if column is not None}
        return Surroundings(**{name: column[hours] for name, column in known.items()})


@dataclass(frozen=True, kw_only=True)
class Facing:
    """What the front faces, each ``(n,)``: air [K], wind coefficient [W/m2K], fourth power of the radiant temperature [K4]."""

    t_air: Floats
    h_wind: Floats
    radiant: Floats

    def at(self, hours: Mask | NDArray[np.intp]) -> Facing:
        """Return the same for some of the hours."""
        return Facing(t_air=self.t_air[hours], h_wind=self.h_wind[hours], radiant=self.radiant[hours])


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
    radiating
        The plate's emittance where that depends on its temperature; it then takes the place of the innermost gap's exchange
        factor, or of ``eps_front`` without a cover.
    eps_above
        Emittance of the face above the plate.
    """

    gaps: tuple[Gap, ...]
    eps_front: float
    sky_share: float
    tilt_deg: float
    pressure: float
    u_back: float
    u_edge: float
    radiating: EmittanceCurve | None = None
    eps_above: float = 1.0

    def step(self, facing: Facing, *, sun_on_covers: Floats, nodes: Floats) -> Step:
        """Return the losses linearised at a state, covers eliminated."""
        return newton_step(self, facing, sun_on_covers=sun_on_covers, nodes=nodes)

    def facing(self, around: Surroundings) -> Facing:
        """Return what the front faces: sky and ground become one radiant temperature by their shares of the view."""
        sky, ground = around.t_sky**4, around.t_ground**4
        return Facing(t_air=around.t_air, h_wind=around.h_wind, radiant=ground + self.sky_share * (sky - ground))


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
        sky_share=collector.sky_open * (1.0 if collector.whole_sky else sky_view_factor(collector.tilt_deg)),
        tilt_deg=collector.tilt_deg,
        pressure=pressure,
        u_back=collector.u_back,
        u_edge=collector.u_edge,
        radiating=collector.absorber.radiating,
        eps_above=collector.covers[-1].emittance if collector.covers else 1.0,
    )


def newton_step(network: Network, facing: Facing, *, sun_on_covers: Floats, nodes: Floats) -> Step:
    """Linearise the losses at a state and eliminate the covers, from the outside in.

    Parameters
    ----------
    network, facing
        The collector and what its front faces, n hours.
    sun_on_covers
        Sunlight absorbed in each cover, ``(covers, n)`` [W/m2].
    nodes
        Temperatures, covers from the outside in and then the plate, ``(covers + 1, n)`` [K].

    Returns
    -------
    Step
        The plate's loss with its true slope, and how the covers follow.
    """
    convection, radiation, slope = _outside(network, facing, nodes[0])
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
    above_air = nodes[-1] - facing.t_air
    back, edge = network.u_back * above_air, network.u_edge * above_air
    losses = Losses(convection, radiation, back, edge, np.array(residuals).reshape(len(residuals), above_air.size))
    return Step(losses, relaxed + back + edge, slope, slope + (network.u_back + network.u_edge), shifts, follows)


def _outside(network: Network, facing: Facing, t_front: Floats) -> tuple[Floats, Floats, Floats]:
    """Convection and radiation from the outermost face, and the slope of both together."""
    if network.radiating is not None and not network.gaps:
        return _outside_of_plate(network.radiating, facing, t_front)
    strength = network.eps_front * SIGMA
    cube = t_front * t_front * t_front
    radiation = strength * (cube * t_front - facing.radiant)
    return facing.h_wind * (t_front - facing.t_air), radiation, (4.0 * strength) * cube + facing.h_wind


def _outside_of_plate(radiating: EmittanceCurve, facing: Facing, t_plate: Floats) -> tuple[Floats, Floats, Floats]:
    """The same from a bare plate whose emittance, and with it what it takes up of the sky's long wave, follows its temperature."""
    eps, rise = radiating(t_plate)
    cube = t_plate * t_plate * t_plate
    black = SIGMA * (cube * t_plate - facing.radiant)
    slope = (4.0 * SIGMA) * eps * cube + rise * black + facing.h_wind
    return facing.h_wind * (t_plate - facing.t_air), eps * black, slope


def _through_gap(
    network: Network, gap: Gap, *, t_upper: Floats, t_lower: Floats
) -> tuple[Floats, Floats, Floats, Floats]:
    """Convection and radiation upward through a gap, and the slopes of both together to either face."""
    gas = air(0.5 * (t_upper + t_lower), pressure=network.pressure)
    difference = t_lower - t_upper
    rayleigh = gas.rayleigh * gap.thickness**3 * difference
    nusselt, climb = gap_nusselt(rayleigh, tilt_deg=network.tilt_deg, aspect=gap.aspect)
    film = gas.conductivity / gap.thickness
    convection = nusselt * film * difference
    by_difference = film * (nusselt + climb)
    by_mean = (
        0.5 * difference * (nusselt * (gas.conductivity_slope / gap.thickness) + film * climb * gas.rayleigh_log_slope)
    )
    if network.radiating is not None and gap is network.gaps[-1]:
        eps, rise = network.radiating(t_lower)
        factor = 1.0 / (1.0 / network.eps_above + 1.0 / eps - 1.0)
        radiation, by_lower, by_upper = radiative_flux(t_lower, t_upper, factor=factor)
        by_lower += radiation * factor * rise / (eps * eps)
    else:
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
