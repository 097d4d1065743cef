"""From steps of 1 to 60 minutes to hours: each hour is the mean of its steps, so that energy is kept."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pandas as pd

from weather.errors import InputError, Problem
from weather.formats.raw import Raw
from weather.year import Floats

__all__ = ["hourly", "step_of"]

ENOUGH = 0.5  # of an hour's steps, below which the hour counts as missing


def step_of(index: pd.DatetimeIndex, *, file: str) -> float:
    """Minutes from row to row, the most common.

    Parameters
    ----------
    index
        Stamps.
    file
        For messages.

    Returns
    -------
    float
        1 to 60, and so many that they fill an hour [min].

    Raises
    ------
    InputError
        The rows are farther apart, or do not fill an hour.
    """
    apart: Floats = np.diff(index.to_numpy().astype("datetime64[s]").astype(np.float64)) / 60.0
    forward = apart[apart > 0.0]
    if not forward.size:
        got = "no two rows that follow each other in time"
        raise InputError(Problem(where=file, what="rows have no step in time", got=got, allowed="1 to 60 min"))
    lengths, counts = np.unique(forward, return_counts=True)
    step = float(lengths[np.argmax(counts)])
    if not 1.0 <= step <= 60.0 or 60.0 % step:
        do = "average or interpolate the table to hours first"
        allowed = "1 to 60 min, a whole number of steps to the hour"
        raise InputError(
            Problem(where=file, what="rows at an unusable step", got=f"{step:g} min", allowed=allowed, do=do)
        )
    return step


def hourly(raw: Raw, *, file: str) -> Raw:
    """Rows brought to whole hours.

    Every hour is the plain mean of its steps, so that the year's energy is that of the rows; its middle is the mean of the
    steps' own middles. Steps that are missing are filled in a straight line where at least half of the hour is there.

    Parameters
    ----------
    raw
        As read.
    file
        For messages.

    Returns
    -------
    Raw
        Itself if its step is an hour.

    Raises
    ------
    InputError
        A step stands twice, or between two others.
    """
    if raw.step_min == 60.0:
        return raw
    order = np.argsort(raw.index.to_numpy(), kind="stable")
    stamps = raw.index[order]
    _refuse_untimely(stamps, step_min=raw.step_min, file=file)
    per_hour = round(60.0 / raw.step_min)
    lag = pd.Timedelta(minutes=raw.step_min if raw.stamp == "end" else 0.0)
    start = pd.DatetimeIndex(stamps - lag)
    hour = start.floor("h")
    step = ((start - hour) / pd.Timedelta(minutes=raw.step_min)).to_numpy().astype(int)
    labels, row = np.unique(hour.to_numpy(), return_inverse=True)
    columns: dict[str, Floats] = {}
    filled = 0
    for name, values in raw.columns.items():
        grid = np.full((len(labels), per_hour), np.nan)
        grid[row, step] = values[order]
        columns[name], count = _means(grid)
        filled = max(filled, count)
    within = float(((start - hour) / pd.Timedelta(minutes=1)).to_numpy().min())  # of the hour's first step
    middle = within + 30.0 + (0.0 if raw.stamp != "middle" else -0.5 * raw.step_min) + _beyond_ends(raw)
    said = [
        f"steps of {raw.step_min:g} min averaged to hours: each hour is the mean of its {per_hour} steps, energy is kept"
    ]
    if filled:
        said.append(f"{filled} steps of {raw.step_min:g} min missing within their hours, filled in a straight line")
    return replace(
        raw,
        index=pd.DatetimeIndex(labels),
        columns=columns,
        stamp="start",
        rule_min=middle,
        said=(*raw.said, *said),
    )


def _refuse_untimely(stamps: pd.DatetimeIndex, *, step_min: float, file: str) -> None:
    if (twice := np.flatnonzero(stamps[1:] == stamps[:-1])).size:
        got = f"{twice.size} such steps, first at {stamps[twice[0]]}"
        raise InputError(Problem(where=file, what="a step of the year stands twice", got=got, allowed="one row a step"))
    seconds = stamps.to_numpy().astype("datetime64[s]").astype(np.int64) % round(60.0 * step_min)
    common = np.bincount(seconds).argmax()
    if (off := np.flatnonzero(seconds != common)).size:
        got = f"{off.size} rows, first at {stamps[off[0]]}"
        allowed, do = f"a row every {step_min:g} min", "mend those stamps, or average the table to hours first"
        raise InputError(Problem(where=file, what="rows off the common step", got=got, allowed=allowed, do=do))


def _beyond_ends(raw: Raw) -> float:
    """What a reader's rule adds beyond the convention itself [min]."""
    usual = {"start": 0.5 * raw.step_min, "middle": 0.0, "end": -0.5 * raw.step_min}
    return raw.rule_min - usual[raw.stamp]


def _means(grid: Floats) -> tuple[Floats, int]:
    """Mean of each row, gaps filled from step to step where half of the row is there; and how many steps were filled."""
    known = np.isfinite(grid)
    count = known.sum(axis=1)
    enough = count >= ENOUGH * grid.shape[1]
    open_steps = ~known & enough[:, np.newaxis]
    if open_steps.any():
        flat, places = grid.ravel().copy(), np.arange(grid.size)
        flat[open_steps.ravel()] = np.interp(places[open_steps.ravel()], places[known.ravel()], flat[known.ravel()])
        grid = flat.reshape(grid.shape)
    means = np.full(len(grid), np.nan)
    means[enough] = grid[enough].mean(axis=1)
    return means, int(open_steps.sum())
