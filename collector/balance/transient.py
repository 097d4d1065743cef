"""Heat balance of every hour with heat held: one lumped node that drifts, is cooled by the fluid, and stores."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dtbtrs

from collector.balance.losses import Facing, Losses, Surroundings
from collector.balance.operated import Operated
from collector.balance.optics import Absorbed
from collector.balance.steady import LONGEST_STEP, MOST_FILMS, SETTLED, SOLVED, Flow, Network, Uptake, first_guess
from collector.balance.stepped import Line, SteppedHour, in_steps, with_stepped
from weather.year import Floats, Mask

__all__ = ["DriftModel", "solve_drift"]

HOUR = 3600.0  # s
EXACT = 4e-7  # W/m2, of every part's balance and every hour's joint
MOST_ITERATIONS = 18  # after which what is open is solved in small steps
MOST_PASSES = 6
SAME = 1e-9  # K
FITTED = (
    0.05  # K, a part's move below which its exponential stays as it is: at a relation's kink it would flip for ever
)

Hours = NDArray[np.intp]


@dataclass(kw_only=True)
class _Memory:
    """What is known of each hour in one state of the pump; kept while the hour is in the other.

    Parameters
    ----------
    nodes
        ``(covers + 1, n)`` [K].
    fall
        Of the plate's net gain per kelvin, which shapes its course, ``(n,)``; NaN until first taken [W/m2K].
    """

    nodes: Floats
    fall: Floats


@dataclass(kw_only=True)
class _State:
    """Where the iteration stands.

    Parameters
    ----------
    memories
        Of the standing and of the running state.
    flow
        Film and heat capacity flow of each hour, ``(2, n)``, taken at the mean fluid temperature ``t_film`` ``(n,)`` [K].
    ends, ran
        Plate temperature at the end of each hour [K], and whether the pump runs then.
    """

    memories: tuple[_Memory, _Memory]
    flow: Floats
    t_film: Floats
    ends: Floats
    ran: Mask


class _Part(NamedTuple):
    """Part of some ``hours`` in one state of the pump: its ``share`` of the hour; ``nodes``, start, end and mean [K].

    ``on``: whether it is taken with the pump on; ``runs``: whether it counts as running, as it does too where the pump cycles;
    ``by_start``: move of the end, or where the part is cut at the fed temperature of its share, per kelvin of the start;
    ``mean_by_start``: of the mean.
    """

    hours: Hours
    on: Mask
    runs: Mask
    nodes: Floats
    line: Line
    share: Floats
    start: Floats
    end: Floats
    mean: Floats
    by_start: Floats
    mean_by_start: Floats

    @property
    def open(self) -> Floats:
        """How far the part's nodes are from its mean, as heat [W/m2]."""
        moves = self.line.step.move(plate=self.mean - self.line.t)
        return np.asarray(self.line.fall * np.abs(moves).max(axis=0))


def solve_drift(
    network: Network, around: Surroundings, absorbed: Absorbed, *, capacity: float, uptake: Uptake
) -> Operated:
    """Solve all hours of a year at once, the plate's heat carried from each to the next.

    Within an hour everything outside is constant. The mean temperature stands between start and end where an exponential would
    have it; what is stored is the net gain at that mean, so that energy closes whatever the shape. The pump runs while the plate
    is warmer than the fed temperature; an hour in which it gets there, or falls below, has two parts, one in each state. The
    hours' end temperatures are the unknowns of one Newton iteration, whose matrix has one diagonal beside the main one.

    Parameters
    ----------
    network, around, absorbed
        Collector, what it faces and the sun it absorbs, n hours.
    capacity
        Heat held per kelvin of the plate, above 0 [J/m2K].
    uptake
        Tubes, stream and fed temperature.

    Returns
    -------
    Operated
        n hours. The year begins at the temperature it ends with.

    Notes
    -----
    **Source**: one lumped node, Duffie & Beckman, Sec. 6.12; exponential fitting after Liniger & Willoughby, SIAM J. Numer.
    Anal. 7 (1970) 47 (from memory). Held against a stiff integrator on an independent scalar solution by
    ``tests/test_transient.py``.
    """
    model = DriftModel(network, network.facing(around), absorbed, uptake, capacity / HOUR)
    state = model.guess(around)
    stepped: dict[int, SteppedHour] = {}
    for _ in range(MOST_PASSES):
        first, second, stuck = _iterate(model, state, stepped)
        moved = [hour for hour, one in stepped.items() if abs(one.start - state.ends[hour - 1]) > SAME]
        if not stuck and not moved:
            break
        for hour in sorted({*stuck, *moved}):
            solved = in_steps(
                model, hour, start=float(state.ends[hour - 1]), ran=bool(state.ran[hour - 1]), flow=state.flow
            )
            stepped[hour], state.ends[hour], state.ran[hour] = solved, solved.end, solved.ran
    return with_stepped(_drift(model, first, second, state=state), stepped, model=model)


def _iterate(
    model: DriftModel, state: _State, stepped: Mapping[int, SteppedHour]
) -> tuple[_Part, _Part, list[int]]:  # fmt: skip
    """Newton on the ends of all hours but those solved in small steps, whose ends stand; the hours that stay open."""
    free = np.ones(state.ends.size, dtype=bool)
    free[list(stepped)] = False
    known: _Part | None = None
    for iteration in range(MOST_ITERATIONS):
        first = known = model.first(state, known=known)
        second = model.second(state, first)
        end, by_start, ran = _joined(first, second)
        state.ran = np.where(free, ran, state.ran)
        missed, by_start = np.where(free, end - state.ends, 0.0), np.where(free, by_start, 0.0)
        left = np.maximum(model.rate * np.abs(missed), np.where(free, first.open, 0.0))
        left[second.hours] = np.maximum(left[second.hours], np.where(free[second.hours], second.open, 0.0))
        if left.max() < EXACT:
            break
        shift = np.clip(_carried(missed, by_start), -LONGEST_STEP, LONGEST_STEP)
        _remember(state.memories, first, second, moved=np.roll(shift, 1))
        if iteration < MOST_FILMS:
            for part in (first, second):
                model.refilm(part, state)
        state.ends = state.ends + shift
    return first, second, np.flatnonzero(left >= EXACT).tolist()


class DriftModel(NamedTuple):
    """What is solved; heat held per kelvin and hour as ``rate`` [W/m2K]."""

    network: Network
    facing: Facing
    absorbed: Absorbed
    uptake: Uptake
    rate: float

    @property
    def feed(self) -> float:
        """The fed temperature [K]."""
        return self.uptake.feed.temperature

    @property
    def starts(self) -> float:
        """Plate temperature at which the pump starts [K]."""
        return self.feed + self.uptake.start_above

    @property
    def stops(self) -> float:
        """Plate temperature at which the pump stops [K]."""
        return self.feed + self.uptake.stop_above

    def guess(self, around: Surroundings) -> _State:
        """Standing near balance but not above the feed; running a little above it; film and heat capacity flow at the feed."""
        network, sun = self.network, self.absorbed.plate
        loss = 3.0 + network.u_back + network.u_edge + (0.0 if network.gaps else float(around.h_wind.mean()))
        alone = around.t_air + sun / loss
        above = 0.02 * loss * np.maximum(alone - self.feed, 0.0)
        standing, running = (
            _Memory(
                nodes=first_guess(network, around, t_plate=t_plate),
                fall=np.full_like(sun, np.nan),
            )
            for t_plate in (np.minimum(alone, self.feed), self.feed + above)
        )
        standing.nodes[-1] += np.where(alone > self.feed, above, 0.0)
        return _State(
            memories=(standing, running),
            flow=np.array(self.uptake.stream.at(np.full_like(sun, self.feed))),
            t_film=np.full_like(sun, self.feed),
            ends=np.minimum(standing.nodes[-1], running.nodes[-1]),
            ran=np.zeros(sun.size, dtype=bool),
        )

    def first(self, state: _State, *, known: _Part | None) -> _Part:
        """The part that begins every hour, cut where the pump starts or stops; what stayed as known is not taken again."""
        memories, flow, start, ran = state.memories, state.flow, np.roll(state.ends, 1), np.roll(state.ran, 1)
        on = (start > self.starts) | (ran & (start > self.stops))
        hours = np.arange(on.size)
        nodes = np.where(on, memories[1].nodes, memories[0].nodes)
        fall = np.where(on, memories[1].fall, memories[0].fall)
        line = (
            self.line(hours, on, nodes=nodes, flow=flow)
            if known is None
            else self._renewed(known, on, nodes=nodes, flow=flow)
        )
        fall = np.where(np.isnan(fall), line.fall, fall)
        speed = np.maximum(fall / self.rate, 1e-3)
        weight = 1.0 / (1.0 - np.exp(-speed)) - 1.0 / speed
        damping = 1.0 + weight * line.fall / self.rate
        gain, way = line.at(start), np.where(on, self.stops, self.starts) - start
        rise = gain / self.rate / damping
        by_start, mean_by_start = 1.0 - line.fall / self.rate / damping, 1.0 / damping
        share = np.ones_like(start)
        left = line.at(start + way) / np.where(gain == 0.0, np.inf, gain)
        cut = np.flatnonzero((left < 1.0) & (left > np.exp(-line.fall / self.rate)) & (gain * way > 0.0))
        x = -np.log(left[cut])  # the exponential gets to the pump's temperature when this much of the gain is left
        share[cut], weight[cut], by_start[cut] = x * self.rate / line.fall[cut], _weight(x), -self.rate / gain[cut]
        rise[cut], mean_by_start[cut] = way[cut], 1.0 - weight[cut]
        return _Part(
            hours, on, on, nodes, line, share, start, start + rise, start + weight * rise, by_start, mean_by_start
        )

    def second(self, state: _State, first: _Part) -> _Part:
        """The part that ends an hour which has two, in the other state of the pump.

        Where the pump would start and stop again and again, the plate stays between, and the fluid takes all that is gained.
        """
        memories, flow = state.memories, state.flow
        hours = np.flatnonzero(first.share < 1.0)
        on = ~first.on[hours]
        nodes = np.where(on, memories[1].nodes[:, hours], memories[0].nodes[:, hours])
        fall = np.where(on, memories[1].fall[hours], memories[0].fall[hours])
        line = self.line(hours, on, nodes=nodes, flow=flow)
        share = 1.0 - first.share[hours]
        time = share / self.rate
        weight = _weight(np.where(np.isnan(fall), line.fall, fall) * time)
        damping = 1.0 + weight * line.fall * time
        start = first.end[hours]
        gain = line.at(start)
        rise = time * gain / damping
        by_start = -first.by_start[hours] / self.rate * gain / damping**2
        end, mean, runs = start + rise, start + weight * rise, on
        if self.starts > self.stops:
            balance = line.t + line.net / line.fall
            cycles = np.where(on, balance < self.stops, balance > self.starts)
            between = 0.5 * (self.starts + self.stops)
            line = line._replace(drawn=np.where(cycles, line.drawn + line.net, line.drawn))
            end, mean = np.where(cycles, start, end), np.where(cycles, between, mean)
            by_start, runs = np.where(cycles, 0.0, by_start), on | cycles
        return _Part(hours, on, runs, nodes, line, share, start, end, mean, by_start, np.zeros(hours.size))

    def refilm(self, part: _Part, state: _State) -> None:
        """Take film and heat capacity flow again where the mean fluid temperature has left the one they were taken at."""
        late = part.on & (np.abs(part.line.t_mean - state.t_film[part.hours]) > SETTLED)
        if late.any():
            hours, t_mean = part.hours[late], part.line.t_mean[late]
            state.flow[:, hours], state.t_film[hours] = self.uptake.stream.at(t_mean), t_mean

    def _renewed(self, known: _Part, on: Mask, *, nodes: Floats, flow: Floats) -> Line:
        """The known line, taken again in the hours whose nodes have moved or whose pump has turned."""
        hours = np.flatnonzero((nodes != known.nodes).any(axis=0) | (on != known.on))
        if hours.size > 0.7 * on.size:
            return self.line(np.arange(on.size), on, nodes=nodes, flow=flow)
        _put(known.line, self.line(hours, on[hours], nodes=nodes[:, hours], flow=flow), hours)
        return known.line

    def line(self, hours: Hours, on: Mask, *, nodes: Floats, flow: Floats) -> Line:
        """Net gain of some hours at given temperatures, with the pump on or off."""
        whole = hours.size == self.absorbed.plate.size
        sun, facing = (self.absorbed, self.facing) if whole else (self.absorbed.at(hours), self.facing.at(hours))
        step = self.network.step(facing, sun_on_covers=sun.covers, nodes=nodes)
        t_plate, runs = nodes[-1], np.flatnonzero(on)
        coupling = self.uptake.coupling(step.slope[runs], flow=Flow(*flow[:, hours[runs]]))
        useful = self.uptake.useful(coupling, t_plate=t_plate[runs])
        conductance, drawn, t_mean = np.zeros(on.size), np.zeros(on.size), t_plate.copy()
        conductance[runs], drawn[runs] = coupling.conductance, useful
        t_mean[runs] = self.uptake.mean(coupling, t_plate=t_plate[runs], useful=useful)
        return Line(
            t=t_plate,
            net=sun.plate - step.loss - drawn,
            fall=step.slope + conductance,
            step=step,
            drawn=drawn,
            t_mean=t_mean,
        )


def _put(whole: Any, part: Any, hours: Hours) -> None:
    """Put some hours of arrays, however nested in tuples and lists, in their places."""
    if isinstance(whole, np.ndarray):
        whole[..., hours] = part
        return
    for one, other in zip(whole, part, strict=True):
        _put(one, other, hours)


def _weight(x: Floats) -> Floats:
    """Where an exponential's mean stands between start and end: at half for a straight course, near the end for a quick one."""
    x = np.clip(x, 1e-3, 500.0)
    return -1.0 / np.expm1(-x) - 1.0 / x


def _carried(missed: Floats, by_start: Floats) -> Floats:
    """Moves of the ends that make each hour begin where the one before it ends: a unit triangle of two diagonals."""
    bands = np.array([np.ones_like(missed), -np.roll(by_start, -1)])
    shift, _ = dtbtrs(bands, missed, uplo="L", diag="U")
    return np.asarray(shift)


def _joined(first: _Part, second: _Part) -> tuple[Floats, Floats, Mask]:
    """End temperature of every hour, its move per kelvin of the start, and whether the pump runs then."""
    end, by_start, ran = first.end.copy(), first.by_start.copy(), first.runs.copy()
    end[second.hours], by_start[second.hours], ran[second.hours] = second.end, second.by_start, second.runs
    return end, by_start, ran


def _remember(memories: tuple[_Memory, _Memory], first: _Part, second: _Part, *, moved: Floats) -> None:
    """Move each part's nodes to its mean, for the start as it has moved; keep what shapes its course while that still moves."""
    nodes, fall = _moved(first, memories, moved=moved)
    for memory, here in zip(memories, (~first.on, first.on), strict=True):
        memory.nodes = np.where(here, nodes, memory.nodes)
        memory.fall = np.where(here, fall, memory.fall)
    nodes, fall = _moved(second, memories, moved=np.zeros(second.hours.size))
    for memory, here in zip(memories, (~second.on, second.on), strict=True):
        memory.nodes[:, second.hours[here]] = nodes[:, here]
        memory.fall[second.hours[here]] = fall[here]


def _moved(part: _Part, memories: tuple[_Memory, _Memory], *, moved: Floats) -> tuple[Floats, Floats]:
    """A part's nodes at its mean, left alone where they are there already, and what shapes its course."""
    moves = part.line.step.move(plate=part.mean + part.mean_by_start * moved - part.line.t)
    largest = np.abs(moves).max(axis=0)
    moves = np.where(largest * part.line.fall < 0.1 * EXACT, 0.0, np.clip(moves, -LONGEST_STEP, LONGEST_STEP))
    known = np.where(part.on, memories[1].fall[part.hours], memories[0].fall[part.hours])
    return part.nodes + moves, np.where((largest > FITTED) | np.isnan(known), part.line.fall, known)


def _drift(model: DriftModel, first: _Part, second: _Part, *, state: _State) -> Operated:
    """Hours put together of their parts, each balance taken afresh."""
    parts, flow = (first, second), state.flow
    end, _, _ = _joined(first, second)

    def summed(values: tuple[Floats, Floats]) -> Floats:
        whole = first.share * values[0]
        whole[second.hours] += second.share * values[1]
        return whole

    useful = summed((first.line.drawn, second.line.drawn))
    paths = zip(first.line.step.losses[:4], second.line.step.losses[:4], strict=True)
    convection, radiation, back, edge = (summed((a * first.runs, b * second.runs)) for a, b in paths)
    running = Losses(convection, radiation, back, edge, np.zeros((0, end.size)))
    totals = (first.line.step.losses.total * ~first.runs, second.line.step.losses.total * ~second.runs)
    idle, stored = summed(totals), model.rate * (end - first.start)
    t_mean = first.line.t_mean.copy()
    t_outlet = t_mean.copy()
    residual = np.abs(model.absorbed.plate - useful - running.total - idle - stored)
    for part in parts:
        hours = part.hours[part.on]
        t_mean[hours] = part.line.t_mean[part.on]
        t_outlet[hours] = model.uptake.outlet(flow=Flow(*flow[:, hours]), useful=part.line.drawn[part.on])
        open_covers = np.abs(part.line.step.losses.cover_residual).max(axis=0, initial=0.0)
        residual[part.hours] = np.maximum(residual[part.hours], open_covers)
    return Operated(
        nodes=np.array([summed(pair) for pair in zip(first.nodes, second.nodes, strict=True)]),
        t_end=end,
        useful=useful,
        running=summed((first.runs.astype(float), second.runs.astype(float))),
        losses=running,
        idle=idle,
        stored=stored,
        t_mean=t_mean,
        t_outlet=t_outlet,
        residual=residual,
        converged=residual < SOLVED,
    )
