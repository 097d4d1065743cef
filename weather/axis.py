"""One hourly axis for a file's rows: a typical year, a calendar year, or several calendar years in their order."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pandas as pd

from weather.errors import InputError, Problem
from weather.formats.raw import Raw
from weather.formats.tmy3 import LEAP_YEAR, PLAIN_YEAR
from weather.year import Floats

__all__ = ["axis_of", "on_axis", "one_year", "runs"]

Places = np.ndarray[Any, np.dtype[np.intp]]
LONGEST_PLAIN = 8784 + 87  # rows of one year, with what may be too many before it is told as such
INSIDE = 24  # h in a row, from which a hole in the middle of a file is told by its place


def axis_of(index: pd.DatetimeIndex, *, at_end: bool, file: str) -> tuple[pd.DatetimeIndex, Places, list[str]]:
    """Hourly axis in the file's own stamps, and the place of each row on it.

    Parameters
    ----------
    index
        Stamps, an hour a row.
    at_end
        Whether they mark the hour's end.
    file
        For messages.

    Returns
    -------
    DatetimeIndex
        Whole years.
    ndarray
        Place of each row.
    list of str
        What was absent or out of order.
    """
    lag = pd.Timedelta(hours=1 if at_end else 0)
    exact = index - lag
    start = exact.floor("h")
    within = exact[0] - start[0] if len(index) else pd.Timedelta(0)
    leap_day = (start.month == 2) & (start.day == 29)
    several = _several(start)
    if several:
        axis = pd.date_range(f"{start.year.min()}-01-01", f"{start.year.max()}-12-31 23:00", freq="h")
        with_leap = set(start.year[leap_day])
        axis = axis[~((axis.month == 2) & (axis.day == 29) & ~axis.year.isin(with_leap))]
        place = axis.get_indexer(start)
    else:
        year = int(start.year[0]) if start.year.nunique() == 1 else (LEAP_YEAR if leap_day.any() else PLAIN_YEAR)
        axis = pd.date_range(f"{year}-01-01", f"{year}-12-31 23:00", freq="h")
        if not leap_day.any():
            axis = axis[~((axis.month == 2) & (axis.day == 29))]
        parts = pd.DataFrame({"year": year, "month": start.month, "day": start.day, "hour": start.hour})
        place = axis.get_indexer(pd.DatetimeIndex(pd.to_datetime(parts)))
    labels = axis + lag + within
    return labels, place, _faults(place, labels=labels, file=file, index=index, several=several)


def _several(start: pd.DatetimeIndex) -> bool:
    """Whether rows are those of calendar years in a row, and not a typical year's from here and there."""
    years = int(start.year.max() - start.year.min()) + 1 if len(start) else 1
    return years > 1 and len(start) > max(LONGEST_PLAIN, 8760 * years // 2)


def one_year(raw: Raw, *, year: int, file: str) -> Raw:
    """The rows of one calendar year.

    Parameters
    ----------
    raw
        As read.
    year
        Which, by the file's own clock.
    file
        For messages.

    Returns
    -------
    Raw
        As read, with those rows alone.

    Raises
    ------
    InputError
        The file has no such year.
    """
    of_row = (raw.index - pd.Timedelta(minutes=raw.step_min if raw.stamp == "end" else 0.0)).year
    kept = np.asarray(of_row == year)
    if not kept.any():
        allowed = ", ".join(str(each) for each in sorted(set(of_row)))
        raise InputError(Problem(where=file, what="no such calendar year in the file", got=str(year), allowed=allowed))
    columns = {name: values[kept] for name, values in raw.columns.items()}
    return replace(raw, index=raw.index[kept], columns=columns, years=(year,))


def _faults(place: Places, *, labels: pd.DatetimeIndex, file: str, index: pd.DatetimeIndex, several: bool) -> list[str]:
    """Refuse what is not one row an hour of whole years; count what is out of order or missing."""
    unique, counts = np.unique(place, return_counts=True)
    size = len(labels)
    if (counts > 1).any():
        row = int(np.flatnonzero(place == unique[counts > 1][0])[1])
        what = "an hour of the year stands twice"
        got = f"{np.count_nonzero(counts > 1)} such hours, first at {index[row]}"
        raise InputError(Problem(where=f"{file}, data row {row + 1}", what=what, got=got, allowed="one row an hour"))
    absent = size - len(unique)
    _refuse_hole(unique, labels=labels, file=file)
    if absent > size // 100:
        what = "not whole calendar years" if several else "not a whole year"
        got = f"{len(place)} hourly rows, {absent} of {size} hours absent"
        raise InputError(Problem(where=file, what=what, got=got, allowed=f"{size}"))
    said = [f"{absent} rows are absent"] if absent else []
    if (np.diff(place) < 0).any():
        said.append("rows were out of order and have been sorted")
    return said


def _refuse_hole(unique: Places, *, labels: pd.DatetimeIndex, file: str) -> None:
    """Refuse a day and more that is missing between rows, saying where."""
    apart = np.diff(unique)
    if not apart.size or apart.max() <= INSIDE:
        return
    last = int(np.argmax(apart))
    first, after = labels[unique[last] + 1], labels[unique[last + 1]]
    hours = int(apart[last]) - 1
    raise InputError(
        Problem(
            where=f"{file}, {str(first)[:16]}",
            what=f"{hours} hours in a row are missing from the rows",
            got=f"{len(unique)} of {len(labels)} hours; the next row is {str(after)[:16]}",
            allowed="one row an hour, single hours missing at most",
            do="put the missing days back, or use another year or file",
        )
    )


def on_axis(values: Floats, *, order: Places, size: int) -> Floats:
    """Column on the axis.

    Parameters
    ----------
    values
        As the rows stand.
    order
        Place of each row.
    size
        Of the axis.

    Returns
    -------
    ndarray
        NaN where there is no row.
    """
    placed = np.full(size, np.nan)
    placed[order] = values
    return placed


def runs(mask: np.ndarray[Any, np.dtype[np.bool_]]) -> list[tuple[int, int]]:
    """Where a condition holds without a break.

    Parameters
    ----------
    mask
        Of each hour.

    Returns
    -------
    list of tuple
        First hour and number of hours of each run.
    """
    edges = np.flatnonzero(np.diff(np.r_[False, mask, False].astype(np.int8)))
    return [(int(first), int(last - first)) for first, last in zip(edges[::2], edges[1::2], strict=True)]
