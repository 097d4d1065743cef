"""What a scenario says of obstacles: rows of collectors as a table of it, the horizon as a file that it names."""

from __future__ import annotations

import csv
import math
from collections.abc import Iterator
from itertools import pairwise
from pathlib import Path
from typing import NamedTuple

from pydantic_core import PydanticCustomError

from collector.build.columns import at_most
from collector.build.table import Table, fault, quantity
from weather.errors import InputError, Problem
from weather.obstacles import Horizon

__all__ = ["RowsTable", "read_horizon"]

COLUMNS = {"azimuth_deg": (0.0, 360.0), "elevation_deg": (-5.0, 90.0)}
HEADER = "a header line azimuth_deg,elevation_deg, and a line a direction, at least two"


class RowsTable(Table):
    """Rows of collectors in front of each other; results are the mean of the field."""

    row_distance_m: float = quantity(0.05, 1000.0, "m", doc="from front edge to front edge, horizontal")
    row_height_m: float = quantity(0.05, 100.0, "m", doc="of the collectors along their slope")
    row_count: int = quantity(1, 10_000, "", doc="rows in the field; the first has none in front")
    slope_of_ground_deg: float = quantity(
        -30.0, 30.0, "deg", doc="positive where the ground rises from row to row towards the back", default=0.0
    )

    def fault_at(self, tilt_deg: float) -> PydanticCustomError | None:
        """Rows that stand over each other, or ground steeper than the collectors.

        Parameters
        ----------
        tilt_deg
            Of the collectors [deg].

        Returns
        -------
        PydanticCustomError or None
            Laid to the key of the mounting at fault, to be raised by its check.
        """
        least = self.row_height_m * math.cos(math.radians(tilt_deg))
        if self.row_distance_m <= least:
            got = f"{self.row_distance_m:g} m"
            allowed = f"above row_height_m x cos(tilt_deg), {least:.3f} m"
            return fault("rows overlap", key="rows.row_distance_m", allowed=allowed, got=got)
        if self.slope_of_ground_deg > tilt_deg:
            got, allowed = f"{self.slope_of_ground_deg:g} deg", f"at most tilt_deg, {tilt_deg:g} deg"
            what = "ground steeper than the collectors: rows behind would shade those in front, which is not computed"
            return fault(what, key="rows.slope_of_ground_deg", allowed=allowed, got=got)
        return None


class _Point(NamedTuple):
    line: int
    azimuth: float
    elevation: float


def read_horizon(path: Path) -> Horizon:
    """Read a horizon's file.

    Parameters
    ----------
    path
        Comma-separated, with a header of the names in ``COLUMNS``; lines that begin with # are comments.

    Returns
    -------
    Horizon
        Checked.

    Raises
    ------
    InputError
        All faults together, in the file's order.
    """
    numbered = [
        (number, line)
        for number, line in enumerate(_text(path).splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    rows = [[cell.strip() for cell in row] for row in csv.reader(line for _, line in numbered)]
    lines = [number for number, _ in numbered]
    if not rows:
        raise InputError(Problem(where=str(path), what="horizon file is empty", allowed=HEADER))
    if sorted(rows[0]) != sorted(COLUMNS):
        got, do = ",".join(rows[0])[:60], "units stand in the names: degrees, azimuth clockwise from north"
        where = f"{path}:{lines[0]}"
        raise InputError(Problem(where=where, what="wrong columns", got=repr(got), allowed=",".join(COLUMNS), do=do))
    faults = [each for line, row in zip(lines[1:], rows[1:], strict=True) for each in _faulty(row, rows[0], path, line)]
    if faults:
        raise InputError(at_most(faults))
    at, up = rows[0].index("azimuth_deg"), rows[0].index("elevation_deg")
    points = [_Point(line, float(row[at]), float(row[up])) for line, row in zip(lines[1:], rows[1:], strict=True)]
    if faults := list(_misplaced(points, path=path)):
        raise InputError(at_most(faults))
    return Horizon(
        azimuth_deg=tuple(point.azimuth for point in points), elevation_deg=tuple(point.elevation for point in points)
    )


def _text(path: Path) -> str:
    try:
        return path.read_text(encoding="utf-8-sig")
    except OSError as refused:
        what = f"horizon file cannot be read: {refused.strerror}"
        raise InputError(Problem(where=str(path), what=what, do="check the path")) from None
    except UnicodeDecodeError:
        what = "horizon file is not UTF-8 text"
        raise InputError(Problem(where=str(path), what=what, allowed="a CSV file in UTF-8")) from None


def _faulty(row: list[str], head: list[str], path: Path, line: int) -> Iterator[Problem]:  # noqa: PLR0917 # of one row
    where = f"{path}:{line}"
    if len(row) != len(head):
        yield Problem(where=where, what="wrong number of cells", got=str(len(row)), allowed=str(len(head)))
        return
    for name, cell in zip(head, row, strict=True):
        low, high = COLUMNS[name]
        try:
            value = float(cell)
        except ValueError:
            do = "decimals with a point; no empty cells"
            yield Problem(where=where, what=f"{name}: not a number", got=repr(cell), do=do)
            continue
        if not low <= value <= high:
            yield Problem(where=where, what=f"{name}: out of range", got=cell, allowed=f"{low:g} to {high:g} deg")


def _misplaced(points: list[_Point], *, path: Path) -> Iterator[Problem]:
    """Too few directions, directions that do not rise, and north given twice."""
    if len(points) < 2:
        yield Problem(where=str(path), what="too few directions", got=str(len(points)), allowed=HEADER)
    for before, after in pairwise(points):
        if after.azimuth <= before.azimuth:
            got = f"{after.azimuth:g} after {before.azimuth:g}"
            do = "sort the rows by azimuth, each direction once"
            yield Problem(
                where=f"{path}:{after.line}", what="azimuth_deg: does not rise", got=got, allowed="rising", do=do
            )
    ends = (points[0], points[-1]) if points else ()
    if ends and ends[1].azimuth - ends[0].azimuth == 360.0 and ends[0].elevation != ends[1].elevation:
        got = f"{ends[0].elevation:g} at 0 deg, {ends[1].elevation:g} at 360 deg"
        what, allowed = "elevation_deg: 0 and 360 deg are one direction", "the same elevation at both, or one of them"
        yield Problem(where=f"{path}:{ends[1].line}", what=what, got=got, allowed=allowed)
