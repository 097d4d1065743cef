"""Measured points of a collector test, from a table whose column names carry their units."""

from __future__ import annotations

import csv
import difflib
import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from collector.physics.fluids import liquid
from weather.errors import InputError, Problem
from weather.year import Floats

__all__ = ["COLUMNS", "Points", "read_points"]

COLUMNS = {  # name: lowest, highest, what it is
    "irradiance_W_m2": (0.0, 1500.0, "total on the plane, all of it taken as beam"),
    "beam_W_m2": (0.0, 1500.0, "or: beam on the plane"),
    "diffuse_W_m2": (0.0, 1500.0, "and diffuse on the plane"),
    "incidence_deg": (0.0, 90.0, "of the beam; 0 if there is no such column"),
    "air_C": (-50.0, 70.0, "air"),
    "inlet_C": (-50.0, 250.0, "fluid inlet"),
    "outlet_C": (-50.0, 250.0, "fluid outlet"),
    "mean_C": (-50.0, 250.0, "or: mean fluid"),
    "flow_kg_s": (0.0, 100.0, "of the module"),
    "wind_m_s": (0.0, 30.0, "at the collector"),
    "sky_C": (-120.0, 80.0, "sky; if there is no such column, as warm as the air"),
    "power_W": (-1e5, 1e6, "of the module"),
    "power_W_m2": (-2000.0, 2000.0, "or: per area of length x width"),
    "efficiency": (-2.0, 2.0, "or: of the irradiance on the plane"),
    "uncertainty_W_m2": (1e-3, 500.0, "standard uncertainty of the power; equal for all if there is no such column"),
}


@dataclass(frozen=True, kw_only=True)
class Points:
    """Points of a test, each ``(n,)``.

    Parameters
    ----------
    beam, diffuse
        On the plane [W/m2].
    incidence_deg
        [deg]
    t_air, t_mean, t_sky
        [K]
    wind
        [m/s]
    power
        Heat per area of length x width [W/m2].
    sigma
        Its standard uncertainty; None where the file has none [W/m2].
    lines
        Of the file.
    notices
        What was assumed.
    """

    beam: Floats
    diffuse: Floats
    incidence_deg: Floats
    t_air: Floats
    t_mean: Floats
    t_sky: Floats
    wind: Floats
    power: Floats
    sigma: Floats | None
    lines: tuple[int, ...]
    notices: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.power)

    @property
    def irradiance(self) -> Floats:
        """Total on the plane [W/m2]."""
        return self.beam + self.diffuse

    @property
    def above_air(self) -> Floats:
        """Mean fluid above air [K]."""
        return self.t_mean - self.t_air


def read_points(path: Path, *, area: float, fluid: str, mass_fraction: float) -> Points:
    """Read measured points.

    Parameters
    ----------
    path
        Comma-separated, with a header of names from ``COLUMNS``; lines that begin with # are comments.
    area
        Length x width of the module [m2].
    fluid, mass_fraction
        Of the test, for the heat capacity where the power has to come from flow and temperatures.

    Returns
    -------
    Points
        Checked.

    Raises
    ------
    InputError
        All faults together.
    """
    head, rows, lines = _table(path)
    values = _numbers(head, rows, lines=lines, path=path)
    said: list[str] = []
    problems = _missing(values, path=path)
    if problems:
        raise InputError(problems)
    t_mean = values["mean_C"] if "mean_C" in values else 0.5 * (values["inlet_C"] + values["outlet_C"])
    n = len(t_mean)
    beam = values["irradiance_W_m2"] if "irradiance_W_m2" in values else values["beam_W_m2"]
    if "sky_C" not in values:
        said.append("no sky_C: the sky is taken as warm as the air")
    if "incidence_deg" not in values:
        said.append("no incidence_deg: normal incidence")
    diffuse = np.zeros(n) if "irradiance_W_m2" in values else values["diffuse_W_m2"]
    return Points(
        beam=beam,
        diffuse=diffuse,
        incidence_deg=values.get("incidence_deg", np.zeros(n)),
        t_air=values["air_C"] + 273.15,
        t_mean=t_mean + 273.15,
        t_sky=values.get("sky_C", values["air_C"]) + 273.15,
        wind=values["wind_m_s"],
        power=_power(values, irradiance=beam + diffuse, area=area, fluid=fluid, mass_fraction=mass_fraction),
        sigma=values.get("uncertainty_W_m2"),
        lines=tuple(lines),
        notices=tuple(said),
    )


def _table(path: Path) -> tuple[list[str], list[list[str]], list[int]]:
    try:
        text = path.read_text(encoding="utf-8-sig")
    except OSError as fault:
        raise InputError(
            Problem(where=str(path), what=f"points can't be read: {fault.strerror}", do="check the path")
        ) from None
    except UnicodeDecodeError:
        raise InputError(
            Problem(where=str(path), what="points are not UTF-8 text", allowed="a CSV file in UTF-8")
        ) from None
    numbered = [(number, line) for number, line in enumerate(text.splitlines(), start=1)]
    kept = [(number, line) for number, line in numbered if line.strip() and not line.lstrip().startswith("#")]
    if len(kept) < 2:
        raise InputError(Problem(where=str(path), what="no points", allowed="a header line and one line a point"))
    cells = [[cell.strip() for cell in row] for row in csv.reader(line for _, line in kept)]
    return cells[0], cells[1:], [number for number, _ in kept[1:]]


def _numbers(head: list[str], rows: list[list[str]], *, lines: list[int], path: Path) -> dict[str, Floats]:
    problems = [_unknown(name, path=path) for name in head if name not in COLUMNS]
    for line, row in zip(lines, rows, strict=True):
        if len(row) != len(head):
            problems.append(
                Problem(where=f"{path}:{line}", what="wrong number of cells", got=str(len(row)), allowed=str(len(head)))
            )
            continue
        problems += [
            fault
            for name, cell in zip(head, row, strict=True)
            if (fault := _faulty(name, cell, where=f"{path}:{line}"))
        ]
    if problems:
        raise InputError(problems[:20])
    columns = np.array([[float(cell) for cell in row] for row in rows]).T
    return dict(zip(head, columns, strict=True))


def _unknown(name: str, *, path: Path) -> Problem:
    close = difflib.get_close_matches(name, COLUMNS, n=1)
    do = f"did you mean {close[0]}?" if close else ""
    return Problem(
        where=str(path), what="unknown column", got=repr(name), allowed="" if close else ", ".join(COLUMNS), do=do
    )


def _faulty(name: str, cell: str, *, where: str) -> Problem | None:
    if name not in COLUMNS:
        return None
    low, high, _ = COLUMNS[name]
    try:
        value = float(cell)
    except ValueError:
        return Problem(
            where=where, what=f"{name}: not a number", got=repr(cell), do="decimals with a point; no empty cells"
        )
    if math.isfinite(value) and low <= value <= high:
        return None
    return Problem(where=where, what=f"{name}: out of range", got=cell, allowed=f"{low:g} to {high:g}")


def _missing(values: dict[str, Floats], *, path: Path) -> list[Problem]:
    """One of each set of columns must be there."""
    needed = {
        "irradiance": (("irradiance_W_m2",), ("beam_W_m2", "diffuse_W_m2")),
        "air": (("air_C",),),
        "fluid": (("mean_C",), ("inlet_C", "outlet_C")),
        "wind": (("wind_m_s",),),
        "power": (("power_W",), ("power_W_m2",), ("efficiency",), ("flow_kg_s", "inlet_C", "outlet_C")),
    }
    return [
        Problem(
            where=str(path), what=f"no column for the {what}", allowed=", or ".join(" with ".join(one) for one in sets)
        )
        for what, sets in needed.items()
        if not any(all(name in values for name in one) for one in sets)
    ]


def _power(values: dict[str, Floats], *, irradiance: Floats, area: float, fluid: str, mass_fraction: float) -> Floats:
    if "power_W_m2" in values:
        return values["power_W_m2"]
    if "power_W" in values:
        return values["power_W"] / area
    if "efficiency" in values:
        return values["efficiency"] * irradiance
    t_mean = 0.5 * (values["inlet_C"] + values["outlet_C"]) + 273.15
    capacity = liquid(fluid, mass_fraction=mass_fraction, t=t_mean).heat_capacity
    return values["flow_kg_s"] * capacity * (values["outlet_C"] - values["inlet_C"]) / area
