"""Hours that one exponential can't describe, in small steps: at a kink of a relation, or where the pump comes and goes."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from collector.balance.losses import Losses, Step
from collector.balance.operated import Operated
from collector.balance.optics import Absorbed
from collector.balance.steady import SOLVED, Flow, Uptake
from weather.year import Floats, Mask

__all__ = ["Line", "SteppedHour", "in_steps", "with_stepped"]

Hours = NDArray[np.intp]
STEPS = 12  # in an hour
COVERS_AT_REST = 1e-10  # K


class Line(NamedTuple):
    """Net gain of the plate [W/m2] at temperature ``t`` [K], linear, with the network and the fluid that it was taken from."""

    t: Floats
    net: Floats
    fall: Floats
    step: Step
    drawn: Floats
    t_mean: Floats

    def at(self, t: Floats) -> Floats:
        """Net gain at another temperature."""
        return self.net - self.fall * (t - self.t)


class Drifting(Protocol):
    """What an hour in small steps needs of the year that it stands in."""

    @property
    def absorbed(self) -> Absorbed:
        """Sunlight of all hours."""

    @property
    def uptake(self) -> Uptake:
        """Tubes, stream and fed temperature."""

    @property
    def rate(self) -> float:
        """Heat held per kelvin and hour [W/m2K]."""

    @property
    def feed(self) -> float:
        """The fed temperature [K]."""

    @property
    def starts(self) -> float:
        """Plate temperature at which the pump starts [K]."""

    @property
    def stops(self) -> float:
        """Plate temperature at which the pump stops [K]."""

    def line(self, hours: Hours, on: Mask, *, nodes: Floats, flow: Floats) -> Line:
        """Return the net gain of some hours at given temperatures."""


class SteppedHour(NamedTuple):
    """One hour from its ``start`` to its ``end`` [K], whether the pump runs then, and its means as in ``Operated``."""

    start: float
    end: float
    ran: bool
    nodes: Floats
    useful: float
    running: float
    losses: Floats
    idle: float
    t_mean: float
    t_outlet: float
    open_covers: float


def with_stepped(hours: Operated, stepped: Mapping[int, SteppedHour], *, model: Drifting) -> Operated:
    """Put hours solved in small steps in their places.

    Parameters
    ----------
    hours
        All.
    stepped
        By the number of the hour.
    model
        What is solved.

    Returns
    -------
    Operated
        The same where there are none.
    """
    if not stepped:
        return hours
    fields = {name: value.copy() for name, value in vars(hours).items() if name != "losses"}
    paths = np.array(hours.losses[:4])
    for hour, solved in stepped.items():
        stored = model.rate * (solved.end - solved.start)
        out = solved.useful + float(solved.losses.sum()) + solved.idle + stored
        residual = max(abs(float(model.absorbed.plate[hour]) - out), solved.open_covers)
        fields["nodes"][:, hour], paths[:, hour] = solved.nodes, solved.losses
        for name in ("useful", "running", "idle", "t_mean", "t_outlet"):
            fields[name][hour] = getattr(solved, name)
        fields["t_end"][hour], fields["stored"][hour] = solved.end, stored
        fields["residual"][hour], fields["converged"][hour] = residual, residual < SOLVED
    convection, radiation, back, edge = paths
    losses = Losses(convection, radiation, back, edge, hours.losses.cover_residual)
    return Operated(losses=losses, **fields)


def in_steps(model: Drifting, hour: int, *, start: float, ran: bool, flow: Floats) -> SteppedHour:
    """Solve one hour from a start, the pump's state taken afresh at every step.

    A step's mean temperature is that of the exponential from its start; what is stored is the net gain at that mean, with the
    covers at rest, so that energy closes whatever the step.

    Parameters
    ----------
    model
        What is solved.
    hour
        Its number.
    start
        Plate temperature [K].
    ran
        Whether the pump runs then.
    flow
        Film and heat capacity flow of each hour, ``(2, n)``.

    Returns
    -------
    SteppedHour
        In twelve steps.
    """
    here, t = np.array([hour]), start
    covers = len(model.absorbed.covers)
    nodes = np.full((covers + 1, 1), t)
    useful = running = idle = warmth = open_covers = 0.0
    means, losses = np.zeros(covers + 1), np.zeros(4)
    for _ in range(STEPS):
        ran = t > model.starts or (ran and t > model.stops)
        line, nodes = _at_rest(model, here, on=ran, nodes=nodes, t=t, flow=flow)
        mean = _mean(line, t=t, rate=model.rate * STEPS)
        line, nodes = _at_rest(model, here, on=ran, nodes=nodes, t=max(mean, model.feed) if ran else mean, flow=flow)
        t += float(line.net[0]) / model.rate / STEPS
        open_covers = max(open_covers, float(np.abs(line.step.losses.cover_residual).max(initial=0.0)))
        total = np.array([float(path[0]) for path in line.step.losses[:4]])
        means += nodes[:, 0] / STEPS
        losses += total * ran / STEPS
        idle += float(total.sum()) * (not ran) / STEPS
        useful += float(line.drawn[0]) / STEPS
        running += ran / STEPS
        warmth += float(line.t_mean[0]) * ran / STEPS
    t_mean = warmth / running if running else float(means[-1])
    outlet = (
        model.uptake.outlet(flow=Flow(*flow[:, here]), useful=np.array([useful / running])) if running else means[-1:]
    )
    return SteppedHour(
        start=start, end=t, ran=ran, nodes=means, useful=useful, running=running, losses=losses, idle=idle, t_mean=t_mean,
        t_outlet=float(outlet[0]), open_covers=open_covers,
    )  # fmt: skip


def _mean(line: Line, *, t: float, rate: float) -> float:
    """Mean of the exponential over one step."""
    fall = float(line.fall[0])
    x = max(fall / rate, 1e-9)
    balance = t + float(line.net[0]) / fall
    return balance + (t - balance) * -float(np.expm1(-x)) / x


def _at_rest(model: Drifting, hour: Hours, *, on: bool, nodes: Floats, t: float, flow: Floats) -> tuple[Line, Floats]:
    """The line at a plate temperature, with the covers where they balance, and all nodes."""
    nodes = nodes.copy()
    nodes[-1] = t
    for _ in range(60):
        line = model.line(hour, np.array([on]), nodes=nodes, flow=flow)
        moves = line.step.move(plate=np.zeros(1))
        if np.abs(moves).max() < COVERS_AT_REST:
            break
        nodes = nodes + moves
    return line, nodes
