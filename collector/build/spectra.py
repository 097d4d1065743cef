"""Measured reflectance spectra and tables of optical constants from files, and everything that was done to them said."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np

from collector.build.columns import Column, Columns, at_most, read_columns, words_of
from collector.physics.layers import Complexes
from collector.physics.spectrum import Spectrum
from weather.errors import InputError, Problem
from weather.year import Floats, Mask

__all__ = ["IndexTable", "MeasuredSpectrum", "read_index", "read_spectrum"]

UNITS = {  # words of a head that tell the unit of wavelength, and metres in it
    "nm": (frozenset({"nm", "nanometer", "nanometers", "nanometre", "nanometres"}), 1e-9),
    "um": (frozenset({"um", "micron", "microns", "micrometer", "micrometers", "micrometre", "micrometres"}), 1e-6),
    "m": (frozenset({"m", "meter", "meters", "metre", "metres"}), 1.0),
    "cm-1": (
        frozenset({"cm-1", "1/cm", "wavenumber", "wavenumbers"}),
        0.0,
    ),  # no multiple of wavelength but of its inverse
}
WAVELENGTH = Column(
    "wavelength", frozenset({"wavelength", "lambda", "\u03bb", "wl"}).union(*(w for w, _ in UNITS.values()))
)
REFLECTANCE = Column(
    "reflectance",
    frozenset({"reflectance", "reflectivity", "reflection", "refl", "r", "rho", "\u03c1"}),
    frozenset({"absorptance", "absorbance", "absorption", "emittance", "emissivity", "transmittance", "transmission"}),
)
INDEX = (Column("n", frozenset({"n"})), Column("k", frozenset({"k", "kappa"})))
PERCENT = frozenset({"%", "percent", "pct"})
FRACTION = frozenset({"fraction", "ratio"})
PLAUSIBLE = (0.1e-6, 1e-3)  # m, wavelengths
SLIGHT = (
    0.02  # beyond 0 and 1 that is set to the bound; also the most by which two readings of a wavelength should differ
)
FEWEST_POINTS = 5
WIDE_STEP = 0.2  # of the logarithm of wavelength


class MeasuredSpectrum(NamedTuple):
    """A spectrum, and what was found and done on the way to it."""

    spectrum: Spectrum
    notices: tuple[str, ...]


class IndexTable(NamedTuple):
    """Complex index over wavelength [m], ``(n,)`` each, wavelength rising; and what was found and done on the way to it."""

    wavelength: Floats
    refractive_index: Complexes
    notices: tuple[str, ...]


def read_spectrum(paths: Sequence[Path]) -> MeasuredSpectrum:
    """Reflectance of an opaque surface from one file, or from several that each cover a part of it.

    Parameters
    ----------
    paths
        Text files with columns of wavelength and reflectance, in any order. Where two overlap they are joined in the middle.

    Returns
    -------
    MeasuredSpectrum
        The spectrum, with a notice for every unit taken and every value changed.

    Raises
    ------
    InputError
        A file can't be read, holds too few points or impossible values, or lies wholly within another.
    """
    if not paths:
        raise InputError(Problem(where="spectrum", what="no file given", allowed="one file or several"))
    parts = sorted((_part(path) for path in paths), key=lambda part: float(part.wavelength[0]))
    notices = [notice for part in parts for notice in part.notices]
    joined = parts[0]
    for part in parts[1:]:
        joined, notice = _join(joined, part)
        notices.append(notice)
    notices += _gaps(joined.wavelength)
    return MeasuredSpectrum(Spectrum(wavelength=joined.wavelength, reflectance=joined.reflectance), tuple(notices))


def read_index(path: Path) -> IndexTable:
    """Refractive index n and extinction k over wavelength from a text file.

    Parameters
    ----------
    path
        Columns of wavelength, n and k.

    Returns
    -------
    IndexTable
        With a notice for the unit taken and everything changed.

    Raises
    ------
    InputError
        The file can't be read, holds too few points or impossible values.
    """
    columns = read_columns(path, wanted=(WAVELENGTH, *INDEX), kind="table of optical constants")
    wavelength, unit = _in_metres(columns, path=path)
    for at, (name, low, high) in enumerate((("n", 1e-3, 100.0), ("k", 0.0, 1000.0)), start=1):
        values = columns.values[:, at]
        outside = (values < low) | (values > high)
        _refuse(columns, path=path, bad=outside, at=at, what=f"{name} out of range", allowed=f"{low:g} to {high:g}")
    grid, values, said = _in_order(wavelength, columns.values[:, 1:], name=path.name, what="n or k")
    _enough(grid, path=path)
    index = np.asarray(values[:, 0] + 1j * values[:, 1], dtype=np.complex128)
    gaps = [f"{path.name}: {gap}" for gap in _gaps(grid)]
    return IndexTable(grid, index, (*columns.notices, unit, *said, *gaps))


class _Part(NamedTuple):
    name: str
    wavelength: Floats
    reflectance: Floats
    notices: list[str]


def _part(path: Path) -> _Part:
    """One file's share of a spectrum, in order of wavelength."""
    columns = read_columns(path, wanted=(WAVELENGTH, REFLECTANCE), kind="spectrum")
    wavelength, unit = _in_metres(columns, path=path)
    reflectance, scale = _as_fraction(columns, path=path)
    grid, values, said = _in_order(wavelength, reflectance[:, None], name=path.name, what="reflectance")
    _enough(grid, path=path)
    inside = np.clip(values[:, 0], 0.0, 1.0)
    changed = np.abs(values[:, 0] - inside)
    if changed.any():
        far, count = int(changed.argmax()), np.count_nonzero(changed)
        furthest = f"furthest {values[far, 0]:.4g} at {_um(grid[far])}"
        said.append(f"{path.name}: reflectance slightly outside 0 to 1 set to the bound: {count} points, {furthest}")
    return _Part(path.name, grid, inside, [*columns.notices, unit, scale, *said])


def _in_metres(columns: Columns, *, path: Path) -> tuple[Floats, str]:
    """Wavelengths [m], and how their unit was found."""
    given, words = columns.values[:, 0], words_of(columns.heads[0])
    unit = next((name for name, (known, _) in UNITS.items() if words & known), "")
    notice = f"{path.name}: wavelength in {unit} by its header"
    if unit == "cm-1":
        notice = f"{path.name}: wavenumber in cm-1 by its header, turned into wavelength"
    if not unit:
        unit = "nm" if given.min() > 100.0 else "um"
        reason = "every value is above 100" if unit == "nm" else "not every value is above 100"
        notice = f"{path.name}: no unit of wavelength in a header; taken as {unit}, since {reason}"
    _refuse(columns, path=path, bad=given <= 0.0, at=0, what="wavelength not above 0", allowed="above 0")
    wavelength = 0.01 / given if unit == "cm-1" else given * UNITS[unit][1]
    bad = (wavelength < PLAUSIBLE[0]) | (wavelength > PLAUSIBLE[1])
    allowed = f"0.1 to 1000 um; the unit was taken as {unit}"
    do = "name the unit in the column's head, nm or um; with decimal commas part the columns by semicolons"
    _refuse(columns, path=path, bad=bad, at=0, what="wavelength out of range", allowed=allowed, do=do)
    return np.asarray(wavelength), notice


def _as_fraction(columns: Columns, *, path: Path) -> tuple[Floats, str]:
    """Reflectances as shares of 1, not yet clipped, and how their unit was found."""
    given, words = columns.values[:, 1], words_of(columns.heads[1])
    percent, named = bool(words & PERCENT), bool(words & (PERCENT | FRACTION))
    most = float(given.max())
    if not named:
        percent = most > 1.5
    unit = "%" if percent else "fractions of 1"
    notice = f"{path.name}: reflectance in {unit} by its header"
    if not named:
        notice = f"{path.name}: no unit of reflectance in a header; taken as {unit}, since values reach {most:.4g}"
    elif percent and most <= 1.0:
        notice += f", though no value is above {most:.4g}: check that they are not fractions"
    scale = 0.01 if percent else 1.0
    bad = (given * scale < -SLIGHT) | (given * scale > 1.0 + SLIGHT)
    allowed = "0 to 100 %, and 2 % beyond for noise" if percent else "0 to 1, and 0.02 beyond for noise"
    _refuse(columns, path=path, bad=bad, at=1, what="reflectance impossible", allowed=allowed)
    return given * scale, notice


def _refuse(columns: Columns, *, path: Path, bad: Mask, at: int, what: str, allowed: str, do: str = "") -> None:
    """Refuse rows, each with its line and the value as the file has it."""
    faults = [
        Problem(
            where=f"{path}:{columns.lines[row]}",
            what=what,
            got=f"{columns.values[row, at]:.6g}",
            allowed=allowed,
            do=do,
        )
        for row in np.flatnonzero(bad)
    ]
    if faults:
        raise InputError(at_most(faults))


def _in_order(wavelength: Floats, values: Floats, *, name: str, what: str) -> tuple[Floats, Floats, list[str]]:
    """Rows by rising wavelength, each wavelength once, and what that took."""
    said = []
    if np.any(np.diff(wavelength) < 0.0):
        said.append(f"{name}: rows not in order of rising wavelength, sorted")
    grid, place, counts = np.unique(wavelength, return_inverse=True, return_counts=True)
    if grid.size == wavelength.size:
        return grid, values[np.argsort(wavelength)], said
    total = np.zeros((grid.size, values.shape[1]))
    lowest, highest = np.full_like(total, np.inf), np.full_like(total, -np.inf)
    np.add.at(total, place, values)
    np.minimum.at(lowest, place, values)
    np.maximum.at(highest, place, values)
    apart = (highest - lowest).max(axis=1)
    said.append(f"{name}: {np.count_nonzero(counts > 1)} wavelengths stand more than once, averaged")
    if apart.max() > SLIGHT:
        said.append(
            f"{name}: readings of one wavelength differ by {apart.max():.3g} in {what}, at {_um(grid[apart.argmax()])}"
        )
    return grid, total / counts[:, None], said


def _enough(grid: Floats, *, path: Path) -> None:
    if grid.size < FEWEST_POINTS:
        got, allowed = f"{grid.size} wavelengths", f"at least {FEWEST_POINTS}"
        raise InputError(Problem(where=str(path), what="too few points", got=got, allowed=allowed))


def _join(short: _Part, long: _Part) -> tuple[_Part, str]:
    """Two parts as one: each up to the middle of where they overlap, or both whole where they do not."""
    first, last = float(long.wavelength[0]), float(short.wavelength[-1])
    if long.wavelength[-1] <= last:
        what, got = f"lies wholly within the range of {short.name}", f"{_um(first)} to {_um(long.wavelength[-1])}"
        do = "leave one of the two out"
        raise InputError(Problem(where=long.name, what=what, got=got, allowed="files that carry on one another", do=do))
    joint = 0.5 * (first + last)
    left, right = short.wavelength <= joint, long.wavelength > joint
    before, after = (float(np.interp(joint, part.wavelength, part.reflectance)) for part in (short, long))
    if first > last:
        left, right = np.ones_like(left), np.ones_like(right)
        notice = f"{short.name} ends at {_um(last)} and {long.name} begins at {_um(first)}: joined by a straight line"
    else:
        overlap = f"which both hold {_um(first)} to {_um(last)}" if first < last else "where they meet"
        notice = f"{short.name} and {long.name}, {overlap}, joined at {_um(joint)}"
    notice += f"; reflectance steps by {after - before:+.3f} there"
    grid = np.concatenate((short.wavelength[left], long.wavelength[right]))
    reflectance = np.concatenate((short.reflectance[left], long.reflectance[right]))
    return _Part(long.name, grid, reflectance, []), notice


def _gaps(wavelength: Floats) -> list[str]:
    wide = np.flatnonzero(np.diff(np.log(wavelength)) > WIDE_STEP)
    return [
        f"no point between {_um(wavelength[at])} and {_um(wavelength[at + 1])}: bridged by a straight line"
        for at in wide
    ]


def _um(wavelength: float) -> str:
    return f"{wavelength * 1e6:.4g} um"
