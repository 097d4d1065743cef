"""Hours that one exponential can't describe, in small steps: at a kink of a relation, or where the pump comes and goes."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from collector.balance.losses import Losses
from collector.balance.operated import Operated
from collector.balance.steady import SOLVED, Flow
from weather.year import Floats

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from collector.balance.transient import DriftModel, Line

    Hours = NDArray[np.intp]

__all__ = ["mended"]

STEPS = 12  # in an hour
COVERS_AT_REST = 1e-10  # K


class _Hour(NamedTuple):
    """One hour: the end [K], whether the pump runs then, and its means in the order of ``Operated``'s fields."""

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


def mended(hours: Operated, *, model: DriftModel, flow: Floats, ran: Floats) -> Operated:
    """Solve again, one after the other, the hours that did not balance, and those after them that feel it.

    A step's mean temperature is that of the exponential from its start; what is stored is the net gain at that mean, with the
    covers at rest, so that energy closes whatever the step.

    Parameters
    ----------
    hours
        As the iteration left them.
    model
        What is solved.
    flow
        Film and heat capacity flow of each hour, ``(2, n)``.
    ran
        Whether the pump ran at each hour's end, ``(n,)``.

    Returns
    -------
    Operated
        The same with those hours replaced.
    """
    fields = {name: value.copy() for name, value in vars(hours).items() if name != "losses"}
    paths = np.array(hours.losses[:4])
    todo = set(np.flatnonzero(~hours.converged).tolist())
    for hour in sorted(todo):
        here, left = hour, len(hours.useful)
        while here in todo and left:
            before = (here - 1) % len(hours.useful)
            solved = _stepped(model, here, start=float(fields["t_end"][before]), ran=bool(ran[before]), flow=flow)
            felt = model.rate * abs(solved.end - fields["t_end"][here]) > SOLVED
            _replace(fields, paths, here, solved, model=model, start=float(fields["t_end"][before]))
            ran[here] = solved.ran
            todo.discard(here)
            here, left = (here + 1) % len(hours.useful), left - 1
            if felt:
                todo.add(here)
    losses = Losses(*paths, hours.losses.cover_residual)
    return Operated(losses=losses, **fields)


def _replace(
    fields: dict[str, Floats], paths: Floats, hour: int, solved: _Hour, *, model: DriftModel, start: float
) -> None:  # fmt: skip
    stored = model.rate * (solved.end - start)
    out = solved.useful + float(solved.losses.sum()) + solved.idle + stored
    residual = max(abs(float(model.absorbed.plate[hour]) - out), solved.open_covers)
    fields["nodes"][:, hour] = solved.nodes
    paths[:, hour] = solved.losses
    for name in ("useful", "running", "idle", "t_mean", "t_outlet"):
        fields[name][hour] = getattr(solved, name)
    fields["t_end"][hour], fields["stored"][hour] = solved.end, stored
    fields["residual"][hour], fields["converged"][hour] = residual, residual < SOLVED


def _stepped(model: DriftModel, hour: int, *, start: float, ran: bool, flow: Floats) -> _Hour:
    """One hour from a start, the pump's state taken afresh at every step."""
    here, t = np.array([hour]), start
    covers = len(model.absorbed.covers)
    nodes = np.full((covers + 1, 1), t)
    sums = {"useful": 0.0, "running": 0.0, "idle": 0.0, "t_mean": 0.0}
    means, losses, open_covers = np.zeros(covers + 1), np.zeros(4), 0.0
    for _ in range(STEPS):
        ran = t > model.starts or (ran and t > model.stops)
        line, nodes = _at_rest(model, here, on=ran, nodes=nodes, t=t, flow=flow)
        mean = _mean(line, t=t, rate=model.rate * STEPS)
        line, nodes = _at_rest(model, here, on=ran, nodes=nodes, t=max(mean, model.feed) if ran else mean, flow=flow)
        t += float(line.net[0]) / model.rate / STEPS
        found = line.step.losses
        open_covers = max(open_covers, float(np.abs(found.cover_residual).max(initial=0.0)))
        total = np.array([float(path[0]) for path in found[:4]])
        means += nodes[:, 0] / STEPS
        losses += total * ran / STEPS
        sums["idle"] += float(total.sum()) * (not ran) / STEPS
        sums["useful"] += float(line.drawn[0]) / STEPS
        sums["running"] += ran / STEPS
        sums["t_mean"] += float(line.t_mean[0]) * ran / STEPS
    share = sums["running"]
    t_mean = sums["t_mean"] / share if share else float(means[-1])
    useful_then = np.array([sums["useful"] / share if share else 0.0])
    outlet = model.uptake.outlet(flow=Flow(*flow[:, here]), useful=useful_then)
    t_outlet = float(outlet[0]) if share else t_mean
    return _Hour(t, ran, means, sums["useful"], share, losses, sums["idle"], t_mean, t_outlet, open_covers)


def _mean(line: Line, *, t: float, rate: float) -> float:
    """Mean of the exponential over one step."""
    fall = float(line.fall[0])
    x = max(fall / rate, 1e-9)
    balance = t + float(line.net[0]) / fall
    return balance + (t - balance) * -float(np.expm1(-x)) / x


def _at_rest(model: DriftModel, hour: Hours, *, on: bool, nodes: Floats, t: float, flow: Floats) -> tuple[Line, Floats]:
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
